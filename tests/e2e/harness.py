# SPDX-License-Identifier: MIT
# Copyright the ullage authors
"""What the end-to-end tests share: a simulated plant as a process of its own, the dashboard in a
private tmux server with a fixed environment, and waiting for a text with a deadline (never a fixed
sleep). Each test prints a line 'ok NAME' or 'not ok NAME'."""

import os
import re
import shutil
import signal
import subprocess
import sys
import tempfile
import time
import traceback

ULLAGE = os.path.abspath(os.environ.get("ULLAGE", "build/ullage"))
# Sanitizers and a loaded machine make everything slower; a deadline is no measurement.
PATIENCE_S = 90

failures = 0


def check(name, test):
    """Runs a test function and prints its line."""
    global failures
    try:
        test()
        print(f"ok {name}", flush=True)
    except Exception:  # a test must never take the others with it
        failures += 1
        print(f"not ok {name}", flush=True)
        traceback.print_exc()


def end():
    sys.exit(1 if failures else 0)


def wait_until(what, probe, patience_s=PATIENCE_S):
    """Calls probe until it returns something true; the state is polled, never guessed."""
    deadline = time.monotonic() + patience_s
    while True:
        found = probe()
        if found:
            return found
        if time.monotonic() > deadline:
            raise AssertionError(f"not within {patience_s} s: {what}")
        time.sleep(0.05)


class Plant:
    """The simulated plant: a copy of a plant file on a free port, and the process behind it."""

    def __init__(self, source, *options, port=0):
        self.folder = tempfile.mkdtemp(prefix="ullage-e2e-")
        self.ini = os.path.join(self.folder, "plant.ini")
        self.truth = os.path.join(self.folder, "truth.csv")
        self.source = source
        self.port = port
        self.options = options
        self.process = None
        self.start()

    def start(self):
        shutil.copyfile(self.source, self.ini)
        self.log_path = os.path.join(self.folder, "simulate.log")
        log = open(self.log_path, "w")
        self.process = subprocess.Popen(
            [ULLAGE, "simulate", "-c", self.ini, "--listen", f"127.0.0.1:{self.port}",
             "--truth", self.truth, *self.options],
            stdin=subprocess.DEVNULL, stdout=subprocess.DEVNULL, stderr=log)
        log.close()

        def listening():
            if self.process.poll() is not None:
                raise AssertionError("simulate ended: " + open(self.log_path).read())
            return re.search(r"listening on 127\.0\.0\.1:(\d+)", open(self.log_path).read())

        self.port = int(wait_until("simulate listens", listening).group(1))
        text = open(self.ini).read()
        text = re.sub(r"(?m)^port(\s*)=.*$", rf"port\1= {self.port}", text)
        open(self.ini, "w").write(text)

    def kill(self):
        if self.process is not None and self.process.poll() is None:
            self.process.send_signal(signal.SIGKILL)
            self.process.wait()

    def stop(self):
        """Ends it as an operator would; returns the exit status."""
        self.process.send_signal(signal.SIGTERM)
        return self.process.wait(timeout=PATIENCE_S)

    def true_value(self, column):
        """The last whole line's value of a column of the truth."""
        lines = open(self.truth).read().split("\n")[:-1]
        header = lines[0].split(",")
        for i, name in enumerate(header):
            if name.split(" ")[0] == column:
                return float(lines[-1].split(",")[i])
        raise AssertionError(f"{column} is not in {header}")

    def close(self):
        self.kill()
        shutil.rmtree(self.folder, ignore_errors=True)


class Terminal:
    """A program in a private tmux server of a fixed size."""

    def __init__(self, columns, rows, *command, term="tmux-256color"):
        self.folder = tempfile.mkdtemp(prefix="ullage-tmux-")
        self.socket = os.path.join(self.folder, "s")
        self.exit_path = os.path.join(self.folder, "exit")
        quoted = " ".join("'" + word.replace("'", "'\\''") + "'" for word in command)
        # Ctrl-C reaches the shell too: it must live to write the status down.
        shell = f"trap : INT; {quoted} 2>'{self.folder}/stderr'; echo $? >'{self.exit_path}'"
        env = {"PATH": os.environ["PATH"], "HOME": self.folder, "TZ": "UTC", "LC_ALL": "C.UTF-8",
               "TERM": "xterm-256color", "SHELL": "/bin/sh"}
        for name in ("ASAN_OPTIONS", "UBSAN_OPTIONS", "LSAN_OPTIONS"):
            if name in os.environ:
                env[name] = os.environ[name]
        self.env = env
        config = os.path.join(self.folder, "conf")
        with open(config, "w") as out:
            out.write(f"set -g default-terminal {term}\nset -g status off\n"
                      "set -g escape-time 0\n")
        self.tmux("-f", config, "new-session", "-d", "-x", str(columns), "-y", str(rows), shell)

    def tmux(self, *words):
        return subprocess.run(["tmux", "-S", self.socket, *words], env=self.env, check=True,
                              stdout=subprocess.PIPE, text=True).stdout

    def keys(self, *keys):
        self.tmux("send-keys", *keys)

    def resize(self, columns, rows):
        self.tmux("resize-window", "-x", str(columns), "-y", str(rows))

    def screen(self):
        if os.path.exists(self.exit_path):
            raise AssertionError("the program ended with " + open(self.exit_path).read() + ": " +
                                 open(os.path.join(self.folder, "stderr")).read())
        return self.tmux("capture-pane", "-p")

    def wait_for(self, pattern, patience_s=PATIENCE_S):
        seen = ""

        def probe():
            nonlocal seen
            seen = self.screen()
            return re.search(pattern, seen)

        try:
            return wait_until(f"/{pattern}/ on the screen", probe, patience_s)
        except AssertionError as error:
            raise AssertionError(f"{error}; the screen was:\n{seen}") from None

    def wait_exit(self):
        return int(wait_until("the program ends", lambda: os.path.exists(self.exit_path) and
                              open(self.exit_path).read().strip()))

    def close(self):
        subprocess.run(["tmux", "-S", self.socket, "kill-server"], env=self.env,
                       stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, check=False)
        shutil.rmtree(self.folder, ignore_errors=True)
