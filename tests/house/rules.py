# SPDX-License-Identifier: MIT
# Copyright the ullage authors
"""The rules of the house that a compiler cannot see. Each takes the top folder of a tree and returns
a list of complaints; none means that the rule is kept. DEVELOPERS.md says why they are there."""

import os
import re
import shlex
import shutil
import subprocess

ROOMS = ("base fluid plant field balance alarm engine history service screen report simulator "
         "verbs").split()
TOP = {"README.md", "DEVELOPERS.md", "Makefile", "src", "include", "config", "tests", "docs",
       "packaging"}
LINES_MAX = 600


def files(root):
    """What git tracks or would track; a tree without git is walked."""
    if os.path.isdir(os.path.join(root, ".git")) or os.path.isfile(os.path.join(root, ".git")):
        listed = subprocess.run(
            ["git", "-C", root, "ls-files", "--cached", "--others", "--exclude-standard", "-z"],
            stdout=subprocess.PIPE, text=True, check=True).stdout.split("\0")
        return sorted(f for f in set(listed) if f and os.path.isfile(os.path.join(root, f)))
    found = []
    for folder, _, names in os.walk(root):
        found += [os.path.relpath(os.path.join(folder, name), root) for name in names]
    return sorted(f for f in found if not f.startswith("build/"))


def read(root, path):
    with open(os.path.join(root, path), encoding="utf-8", errors="replace") as file:
        return file.read()


def c_files(root, *tops):
    return [f for f in files(root) if f.endswith((".c", ".h")) and f.split("/")[0] in tops]


def room_of(path):
    """The room of a source or a face, or None."""
    parts = path.split("/")
    if parts[0] == "src" and len(parts) >= 3:
        return parts[1]
    if parts[:2] == ["include", "ullage"] and len(parts) == 3:
        return parts[2].rsplit(".", 1)[0]
    return None


def rooms(root):
    """A room and its face include only rooms above it in the order of the list."""
    complaints = []
    for path in c_files(root, "src", "include"):
        room = room_of(path)
        if room not in ROOMS:
            complaints.append(f"{path}: '{room}' is no room; the rooms are {' '.join(ROOMS)}")
            continue
        for number, line in enumerate(read(root, path).splitlines(), 1):
            found = re.match(r'\s*#\s*include\s*(["<])([^">]+)[">]', line)
            if not found:
                continue
            name = found.group(2)
            if name.startswith("ullage/"):
                other = name[len("ullage/"):].rsplit(".", 1)[0]
                if other not in ROOMS:
                    complaints.append(f"{path}:{number}: {name} is the face of no room")
                elif ROOMS.index(other) > ROOMS.index(room):
                    complaints.append(f"{path}:{number}: {room} must not include {other}, "
                                      "which stands below it")
            elif found.group(1) == '"' and "/" in name:
                complaints.append(f"{path}:{number}: '{name}' reaches into another folder; "
                                  "include that room's face")
    return complaints


def headers(root):
    """Each header compiles alone."""
    complaints = []
    compiler = shlex.split(os.environ.get("CC") or "cc")
    flags = subprocess.run(["pkg-config", "--cflags", "ncursesw", "libmodbus", "inih",
                            "sqlite3"],
                           stdout=subprocess.PIPE, text=True, check=True).stdout.split()
    for path in c_files(root, "src", "include"):
        if not path.endswith(".h"):
            continue
        done = subprocess.run(
            [*compiler, "-std=c17", "-D_DEFAULT_SOURCE", "-Iinclude", *flags, "-Wall", "-Wextra",
             "-Werror", "-fsyntax-only", "-include", path, "-x", "c", "/dev/null"],
            cwd=root, stderr=subprocess.PIPE, text=True, check=False)
        if done.returncode != 0:
            complaints.append(f"{path} does not compile alone:\n{done.stderr.strip()}")
    return complaints


def licences(root):
    """Each source names its licence and its authors at its top."""
    complaints = []
    for path in files(root):
        name = path.split("/")[-1]
        text = read(root, path)
        source = (name.endswith((".c", ".h", ".sh", ".py")) or name == "Makefile"
                  or text.startswith("#!"))
        top = "\n".join(text.splitlines()[:3])
        if source and ("SPDX-License-Identifier: MIT" not in top
                       or "Copyright the ullage authors" not in top):
            complaints.append(f"{path}: its first lines do not name licence and authors")
    return complaints


def top_level(root):
    """What a visitor sees first is exactly what is meant to be seen."""
    there = {f.split("/")[0] for f in files(root)}
    there = {name for name in there if not name.startswith(".")}
    return ([f"{name} does not belong into the top folder" for name in sorted(there - TOP)] +
            [f"{name} is missing from the top folder" for name in sorted(TOP - there)])


def read_only(root):
    """Nothing but the simulator can write to a device."""
    word = re.compile(r"\bmodbus_(mask_)?write_\w+|\bmodbus_send_raw_request\w*")
    complaints = []
    for path in c_files(root, "src", "include"):
        if path.startswith("src/simulator/"):
            continue
        for number, line in enumerate(read(root, path).splitlines(), 1):
            found = word.search(line)
            if found:
                complaints.append(f"{path}:{number}: {found.group(0)} could write to a device")
    return complaints


def length(root):
    """No source has outgrown one noun; coefficient tables may be longer."""
    complaints = []
    for path in c_files(root, "src", "include"):
        count = read(root, path).count("\n")
        if count > LINES_MAX and not path.startswith("src/fluid/"):
            complaints.append(f"{path} has {count} lines; above {LINES_MAX} look for the second "
                              "noun")
    return complaints


def words(root):
    """No left-over marks, no path of somebody's machine, no exit below the verbs."""
    marks = re.compile(r"\b(TODO|FIXME|XXX|HACK)\b")
    places = re.compile(r"(?<![\w.])/(home|root|work|Users)/\w|/tmp/wt\b")
    leave = re.compile(r"\b(exit|_exit|abort|quick_exit)\s*\(")
    complaints = []
    for path in files(root):
        if path.startswith("tests/house/"):
            continue
        for number, line in enumerate(read(root, path).splitlines(), 1):
            where = f"{path}:{number}"
            if marks.search(line):
                complaints.append(f"{where}: {marks.search(line).group(0)} is left over")
            if places.search(line):
                complaints.append(f"{where}: names a place on one machine")
            if (path.startswith("src/") and not path.startswith("src/verbs/")
                    and path.endswith(".c") and leave.search(line)):
                complaints.append(f"{where}: only verbs may end the program")
    return complaints


def layout(root):
    """C is laid out by .clang-format. None if clang-format is not installed."""
    if shutil.which("clang-format") is None:
        return None
    done = subprocess.run(["clang-format", "--dry-run", "-Werror", "--style=file",
                           *c_files(root, "src", "include", "tests")],
                          cwd=root, stderr=subprocess.PIPE, text=True, check=False)
    first = {}
    for line in done.stderr.splitlines():
        found = re.match(r"([^:\s]+\.[ch]):\d+:\d+: error", line)
        if found:
            first.setdefault(found.group(1), f"{line} (make format mends it)")
    if done.returncode != 0 and not first:
        return [done.stderr]
    return list(first.values())


RULES = (rooms, headers, licences, top_level, read_only, length, words, layout)
