# SPDX-License-Identifier: MIT
# Copyright the ullage authors
#
# GNU make only. Objects live under $(BUILD); a flavour is another build folder.

VERSION := 0.1.0

prefix ?= /usr/local
bindir ?= $(prefix)/bin
BUILD  ?= build
CFLAGS ?= -O2 -g

PKGS      := ncursesw libmodbus inih
PKG_CFLAGS = $(shell pkg-config --cflags $(PKGS) 2>/dev/null)
PKG_LIBS   = $(shell pkg-config --libs $(PKGS) 2>/dev/null)

WARN := -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wsign-conversion -Wstrict-prototypes \
        -Wmissing-prototypes -Wpointer-arith -Wcast-qual -Wwrite-strings -Wformat=2 -Wundef -Wvla \
        -Wdouble-promotion -Wimplicit-fallthrough -Wswitch-enum $(WERROR)
HARDEN := -fstack-protector-strong -fPIE
HARDEN_LD := -pie -Wl,-z,relro,-z,now

ALL_CPPFLAGS = -Iinclude -D_DEFAULT_SOURCE -DULLAGE_VERSION='"$(VERSION)"' $(FORTIFY) $(PKG_CFLAGS) $(CPPFLAGS)
ALL_CFLAGS   = -std=c17 -pthread -ffp-contract=off $(WARN) $(HARDEN) $(CFLAGS)
ALL_LDFLAGS  = -pthread $(HARDEN_LD) $(LDFLAGS)
LIBS         = $(PKG_LIBS) -lm
FORTIFY      = $(if $(findstring -O2,$(CFLAGS)),-D_FORTIFY_SOURCE=2)

SRC     := $(sort $(wildcard src/*/*.c))
APP_SRC := $(filter src/screen/% src/verbs/%,$(SRC))
LIB_SRC := $(filter-out $(APP_SRC),$(SRC))
MAIN    := src/verbs/main.c
TEST_SRC := $(sort $(wildcard tests/*/test_*.c))
obj      = $(patsubst %.c,$(BUILD)/%.o,$(1))
TESTS   := $(patsubst %.c,$(BUILD)/%,$(TEST_SRC))

all: $(BUILD)/ullage

$(BUILD)/ullage: $(call obj,$(APP_SRC)) $(BUILD)/libullage.a
	$(CC) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $@ $^ $(LIBS)

$(BUILD)/libullage.a: $(call obj,$(LIB_SRC))
	@rm -f $@
	$(AR) rcs $@ $^

# Tests may reach the screen room as well as the library; never the verbs.
SCREEN_OBJ = $(call obj,$(filter src/screen/%,$(APP_SRC)))
$(BUILD)/tests/%: $(BUILD)/tests/%.o $(SCREEN_OBJ) $(BUILD)/libullage.a
	$(CC) $(ALL_CFLAGS) $(ALL_LDFLAGS) -o $@ $^ $(shell pkg-config --libs cmocka) $(LIBS)

$(BUILD)/%.o: %.c
	@mkdir -p $(@D)
	$(CC) $(ALL_CPPFLAGS) $(ALL_CFLAGS) -MMD -MP -c -o $@ $<

tests: $(BUILD)/ullage $(TESTS)

clean:
	rm -rf $(BUILD)

.PHONY: all tests clean
.SECONDARY:
-include $(patsubst %.c,$(BUILD)/%.d,$(SRC) $(TEST_SRC))
