# SPDX-License-Identifier: MIT
# Copyright the ullage authors
#
# GNU make only. Objects live under $(BUILD); a flavour is another build folder. User flags are
# added, never overwritten. 'make help' lists the targets.

VERSION := 0.1.0

prefix     ?= /usr/local
bindir     ?= $(prefix)/bin
libdir     ?= $(prefix)/lib
includedir ?= $(prefix)/include
datadir    ?= $(prefix)/share
mandir     ?= $(datadir)/man
docdir     ?= $(datadir)/doc/ullage
pkgdatadir  = $(datadir)/ullage

BUILD   ?= build
CFLAGS  ?= -O2 -g
INSTALL ?= install

PKGS       := ncursesw libmodbus inih sqlite3
PKG_CFLAGS := $(shell pkg-config --cflags $(PKGS) 2>/dev/null)
PKG_LIBS   := $(shell pkg-config --libs $(PKGS) 2>/dev/null)
TEST_LIBS   = $(shell pkg-config --libs cmocka)

WARN := -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wsign-conversion -Wstrict-prototypes \
        -Wmissing-prototypes -Wpointer-arith -Wcast-qual -Wwrite-strings -Wformat=2 -Wundef -Wvla \
        -Wdouble-promotion -Wimplicit-fallthrough -Wswitch-enum $(WERROR)
HARDEN := -fstack-protector-strong -fPIE
HARDEN_LD := -pie -Wl,-z,relro,-z,now

ALL_CPPFLAGS = -Iinclude -D_DEFAULT_SOURCE -DULLAGE_VERSION='"$(VERSION)"' \
               -DULLAGE_DATADIR='"$(pkgdatadir)"' $(FORTIFY) $(PKG_CFLAGS) $(CPPFLAGS)
ALL_CFLAGS   = -std=c17 -pthread -ffp-contract=off $(WARN) $(HARDEN) $(CFLAGS)
ALL_LDFLAGS  = -pthread $(HARDEN_LD) $(LDFLAGS)
LIBS         = $(PKG_LIBS) -lm
FORTIFY      = $(if $(findstring -O2,$(CFLAGS)),-D_FORTIFY_SOURCE=2)

SRC       := $(sort $(wildcard src/*/*.c))
APP_SRC   := $(filter src/screen/% src/verbs/%,$(SRC))
LIB_SRC   := $(filter-out $(APP_SRC),$(SRC))
TEST_SRC  := $(sort $(wildcard tests/*/test_*.c))
BENCH_SRC := $(sort $(wildcard tests/*/bench_*.c))
MAN       := $(sort $(wildcard docs/*.[1-8]))
# The screen is not in the library, so its face is not for other programs.
FACES     := $(filter-out include/ullage/screen.h,$(sort $(wildcard include/ullage/*.h)))
FORMATTED := $(sort $(wildcard src/*/*.[ch] include/ullage/*.h tests/*.h tests/*/*.[ch]))

# 'make V=1' shows the whole commands.
Q   = $(if $(V),,@)
say = $(if $(V),,@printf '  %-4s %s\n' '$(1)' '$(2)')

obj     = $(patsubst %.c,$(BUILD)/%.o,$(1))
TESTS   := $(patsubst %.c,$(BUILD)/%,$(TEST_SRC))
BENCHES := $(patsubst %.c,$(BUILD)/%,$(BENCH_SRC))
SCRIPTS := $(filter-out %.h %.c %.py,$(sort $(wildcard tests/*/check_*)))

# 'make check ROOMS="base fluid"' runs those only; 'make check WITHOUT=house' all others.
ROOMS  ?=
WITHOUT ?=
chosen  = $(foreach t,$(1),$(if $(call wanted,$(notdir $(patsubst %/,%,$(dir $(t))))),$(t)))
wanted  = $(and $(if $(ROOMS),$(filter $(ROOMS),$(1)),yes),$(if $(filter $(WITHOUT),$(1)),,yes))

all: $(BUILD)/ullage ## build the program

$(BUILD)/ullage: $(call obj,$(APP_SRC)) $(BUILD)/libullage.a
	$(call say,ld,$@)
	$(Q)$(CC) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $@ $^ $(LIBS)

$(BUILD)/libullage.a: $(call obj,$(LIB_SRC))
	$(call say,ar,$@)
	@rm -f $@
	$(Q)$(AR) rcs $@ $^

# Tests may reach the screen room as well as the library; never the verbs.
$(BUILD)/libscreen.a: $(call obj,$(filter src/screen/%,$(APP_SRC)))
	$(call say,ar,$@)
	@rm -f $@
	$(Q)$(AR) rcs $@ $^
$(TESTS): $(BUILD)/%: $(BUILD)/%.o $(BUILD)/libscreen.a $(BUILD)/libullage.a
	$(call say,ld,$@)
	$(Q)$(CC) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $@ $^ $(TEST_LIBS) $(LIBS)
$(BENCHES): $(BUILD)/%: $(BUILD)/%.o $(BUILD)/libscreen.a $(BUILD)/libullage.a
	$(call say,ld,$@)
	$(Q)$(CC) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $@ $^ $(LIBS)

$(BUILD)/%.o: %.c $(BUILD)/flags
	@mkdir -p $(@D)
	$(call say,cc,$<)
	$(Q)$(CC) $(ALL_CPPFLAGS) $(ALL_CFLAGS) -MMD -MP -c -o $@ $<

# Other flags or another compiler make every object anew.
$(BUILD)/flags: export FLAGS = $(CC) $(ALL_CPPFLAGS) $(ALL_CFLAGS)
$(BUILD)/flags: always
	@command -v pkg-config >/dev/null && pkg-config --exists $(PKGS) || \
	    { echo "ullage: libraries are missing ($(PKGS)); run packaging/install-deps" >&2; exit 1; }
	@mkdir -p $(@D)
	@printf '%s\n' "$$FLAGS" | cmp -s - $@ || printf '%s\n' "$$FLAGS" >$@

tests: $(BUILD)/ullage $(call chosen,$(TESTS))

# Without a -j of the caller the build uses every core.
PARALLEL = $(if $(findstring -j,$(MAKEFLAGS)),,-j$(shell nproc 2>/dev/null || echo 2))

# What is missing is installed first, so the libraries' flags are read by a make of its own.
check: ## install what tests need, build, run every test
	@packaging/install-deps test
	@$(MAKE) --no-print-directory $(PARALLEL) run-tests

run-tests: tests
	@BUILD='$(BUILD)' ULLAGE='$(BUILD)/ullage' CC='$(CC)' \
	    tests/run $(call chosen,$(TESTS)) $(call chosen,$(SCRIPTS))

check-asan: ## the tests under the address and undefined-behaviour sanitizers
	@$(MAKE) --no-print-directory check WITHOUT=house BUILD=build/asan \
	    CFLAGS='-O1 -g -fno-omit-frame-pointer -fsanitize=address,undefined -fno-sanitize-recover=all'

check-tsan: ## the rooms with threads under the thread sanitizer
	@$(MAKE) --no-print-directory check ROOMS="base field service simulator" BUILD=build/tsan \
	    CFLAGS='-O1 -g -fsanitize=thread'

golden: $(BUILD)/tests/screen/test_golden ## draw the pictures in tests/golden anew, to be reviewed
	@ULLAGE_GOLDEN=write $<
	@git diff --stat -- tests/golden 2>/dev/null || true

bench: $(BENCHES) $(BUILD)/ullage ## print speeds, the figure to reach beside each
	@for bench in $(BENCHES); do echo "$$bench"; BUILD='$(BUILD)' $$bench || exit 1; done

soak: $(BUILD)/tests/field/test_soak ## links among misbehaving devices for a day; SOAK_S=seconds
	ULLAGE_SOAK_S=$(or $(SOAK_S),86400) $<

lines: $(BUILD)/libullage.a ## make the tables of the saturation lines anew, from the equations
	$(Q)$(CC) $(ALL_CPPFLAGS) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $(BUILD)/make_lines \
	    tests/tools/make_lines.c $(BUILD)/libullage.a $(LIBS)
	$(BUILD)/make_lines >$(BUILD)/lines.c
	cp $(BUILD)/lines.c src/fluid/lines.c

demo: ## the dashboard on a simulated plant; needs nothing else
	@packaging/install-deps run
	@$(MAKE) --no-print-directory $(PARALLEL) all
	@$(BUILD)/ullage demo

format: ## lay out the C files by .clang-format
	clang-format -i $(FORMATTED)

format-check: ## fail if a C file is laid out otherwise
	@clang-format --dry-run -Werror $(FORMATTED)

lint: ## static checks by the tools that are installed
	@tests/lint $(SRC) -- $(MAN)

doc: $(MAN:docs/%=$(BUILD)/doc/%.html) ## manual pages as HTML in $(BUILD)/doc
	@mkdir -p $(BUILD)/doc
	cp $(wildcard *.md docs/*.md) $(BUILD)/doc

$(BUILD)/doc/%.html: docs/%
	@mkdir -p $(@D)
	mandoc -Thtml -Ostyle= $< >$@

$(BUILD)/ullage.pc: packaging/ullage.pc.in $(BUILD)/flags
	sed -e 's|@prefix@|$(prefix)|' -e 's|@libdir@|$(libdir)|' -e 's|@includedir@|$(includedir)|' \
	    -e 's|@version@|$(VERSION)|' $< >$@

install: all $(BUILD)/ullage.pc ## install below $(DESTDIR)$(prefix)
	$(INSTALL) -d $(DESTDIR)$(bindir) $(DESTDIR)$(libdir)/pkgconfig $(DESTDIR)$(docdir) \
	    $(DESTDIR)$(includedir)/ullage $(DESTDIR)$(pkgdatadir)
	$(INSTALL) -m 755 $(BUILD)/ullage $(DESTDIR)$(bindir)/
	$(INSTALL) -m 644 $(BUILD)/libullage.a $(DESTDIR)$(libdir)/
	$(INSTALL) -m 644 $(BUILD)/ullage.pc $(DESTDIR)$(libdir)/pkgconfig/
	$(INSTALL) -m 644 $(FACES) $(DESTDIR)$(includedir)/ullage/
	$(INSTALL) -m 644 config/tarn-hollow.ini $(DESTDIR)$(pkgdatadir)/
	$(INSTALL) -m 644 packaging/LICENSE $(wildcard README.md docs/*.md) $(DESTDIR)$(docdir)/
	for page in $(MAN); do \
	    $(INSTALL) -D -m 644 $$page $(DESTDIR)$(mandir)/man$${page##*.}/$${page##*/} || exit 1; \
	done

uninstall: ## take away what install put there
	rm -f $(DESTDIR)$(bindir)/ullage $(DESTDIR)$(libdir)/libullage.a
	rm -f $(DESTDIR)$(libdir)/pkgconfig/ullage.pc
	rm -rf $(DESTDIR)$(includedir)/ullage $(DESTDIR)$(pkgdatadir) $(DESTDIR)$(docdir)
	for page in $(MAN); do rm -f $(DESTDIR)$(mandir)/man$${page##*.}/$${page##*/}; done

dist: ## a source archive of the last commit in $(BUILD)
	@mkdir -p $(BUILD)
	git archive --prefix=ullage-$(VERSION)/ -o $(BUILD)/ullage-$(VERSION).tar.gz HEAD

clean: ## remove $(BUILD)
	rm -rf $(BUILD)

help: ## list the targets
	@sed -n 's/^\([a-z-]*\):[^#]*## \(.*\)/  make \1	\2/p' Makefile | expand -t 20

.PHONY: soak all tests check run-tests check-asan check-tsan golden bench lines demo format format-check lint doc \
        install uninstall dist clean help always
.SECONDARY:
-include $(patsubst %.c,$(BUILD)/%.d,$(SRC) $(TEST_SRC) $(BENCH_SRC))
