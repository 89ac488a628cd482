# SPDX-License-Identifier: GPL-3.0-or-later
# Makefile: the workshop. It runs in two stages: the first looks for the packages (by name, and
# installs what is missing), the second, a fresh make, does the work, because it asks pkg-config
# for flags before any rule runs.
#
#   make                 build/terrace and build/libterrace.a
#   make demo            analyse both examples and say where the reports are
#   make test            all tests (FAST=1: fewer draws, the same tests)
#   make bench           timings of one fit
#   make install         DESTDIR, PREFIX (default /usr/local)
#   make headers         each header compiles alone, under gcc and clang
#   make floors          includes point to an earlier file of the floor, or below
#   make floors-update   write new files into tests/workshop/floors.txt
#   make format          is everything in the house's format? (format-fix applies it)
#   make lengths         functions over 100 lines, files over 500 (only reported)
#   make lint            cppcheck and clang --analyze
#   make valgrind        check, analyze, fit and selfcheck under valgrind
#   make cover           lines and branches that the tests reach (gcov)
#   make dist            build/terrace-VERSION.tar.gz, the same bytes every time
#   make fuzz            fuzz targets of the readers, FUZZ_SECONDS (60) each, with sanitizers
#   make clean
#
# Variants, each with object files of its own: CC=clang, DEV=1 (warnings are errors, and more of
# them), SAN=address,undefined. BUILD=directory builds somewhere else than in build/; V=1 shows each
# compiler call.

ifeq ($(origin CC),default)
CC := gcc
endif
BUILD ?= build
PREFIX ?= /usr/local
GOALS := $(or $(MAKECMDGOALS),all)
export FAST FUZZ_SECONDS

# ---- packages, by their Debian names ---------------------------------------------------------

PACKAGES := gcc libc6-dev pkg-config libgsl-dev libnlopt-dev libcjson-dev libcunit1-dev \
            libcsv-dev libssl-dev
# What the scripts of tests/ call beyond the above and Debian's base system.
TEST_PACKAGES :=
ifneq ($(findstring clang,$(CC)),)
PACKAGES += clang libomp-dev $(if $(SAN),libclang-rt-14-dev)
endif
ifneq ($(filter test,$(GOALS)),)
PACKAGES += $(TEST_PACKAGES)
endif
ifneq ($(filter headers,$(GOALS)),)
PACKAGES += clang libomp-dev
endif
ifneq ($(filter format format-fix,$(GOALS)),)
PACKAGES += clang-format
endif
ifneq ($(filter valgrind,$(GOALS)),)
PACKAGES += valgrind
endif
ifneq ($(filter fuzz,$(GOALS)),)
PACKAGES += clang libomp-dev libclang-rt-14-dev
endif
ifneq ($(filter lint,$(GOALS)),)
PACKAGES += clang libomp-dev cppcheck
endif
# These need a shell and no package.
ifeq ($(filter-out clean floors floors-update lengths dist,$(GOALS)),)
PACKAGES :=
endif

ifndef PACKAGES_READY
# ---- stage 1 ---------------------------------------------------------------------------------

.PHONY: $(GOALS) second-stage
$(GOALS): second-stage
	@:
second-stage:
	@sh tests/workshop/bootstrap.sh "make $(GOALS)" $(sort $(PACKAGES))
	@+$(MAKE) --no-print-directory PACKAGES_READY=1 $(GOALS)

else
# ---- stage 2 ---------------------------------------------------------------------------------

empty :=
Q := $(if $(V),,@)
comma := ,
space := $(empty) $(empty)
variant := $(subst $(space),-,$(strip $(if $(DEV),dev) $(subst $(comma),$(space),$(SAN))))
O := $(BUILD)/obj/$(notdir $(CC))-$(or $(variant),plain)
GEN := $(BUILD)/gen

WARNINGS := -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wsign-conversion
WARNINGS_DEV := -Werror -Wstrict-prototypes -Wmissing-prototypes -Wold-style-definition -Wundef \
    -Wformat=2 -Wcast-qual -Wcast-align -Wwrite-strings -Wpointer-arith -Wvla \
    -Wredundant-decls -Wnested-externs -Winit-self -Wimplicit-fallthrough \
    -Wfloat-conversion -Wunused-parameter -Wstrict-aliasing
WARNINGS_DEV_GCC := -Wlogical-op -Wduplicated-cond -Wtrampolines -Wformat-overflow=2
WARNINGS_DEV_CLANG := -Wcomma -Wmissing-variable-declarations -Wunreachable-code \
    -Wconditional-uninitialized -Wassign-enum -Wloop-analysis
IS_CLANG := $(findstring clang,$(CC))

LIBRARIES := gsl nlopt libcjson libcrypto
CPPFLAGS += -D_POSIX_C_SOURCE=200809L -Isrc -I. $(shell pkg-config --cflags $(LIBRARIES))
CFLAGS ?= -O3 -g
# The same bytes from every compiler: no contraction of a*b+c, and sqrt as one instruction.
FIXED := -std=c11 -ffp-contract=off -fno-math-errno -fopenmp
FLAGS := $(FIXED) $(WARNINGS) $(CFLAGS)
ifdef DEV
FLAGS += $(WARNINGS_DEV) $(if $(IS_CLANG),$(WARNINGS_DEV_CLANG),$(WARNINGS_DEV_GCC))
endif
ifdef SAN
FLAGS += -fsanitize=$(SAN) -fno-sanitize-recover=all -fno-omit-frame-pointer
endif
LDLIBS += $(shell pkg-config --libs $(LIBRARIES)) -lcsv -lm
CUNIT_LIBS := $(shell pkg-config --libs cunit)

# Sources compiled once per instruction set, into NAME.sse2.o and NAME.avx2.o (and not a third
# time). No other file ever gets a flag that allows instructions beyond the baseline.
ISA_SOURCES := src/base/vecmath.c src/posterior/kernel.c src/posterior/marginal.c \
    src/posterior/marginal_basis.c src/posterior/marginal_chain.c src/posterior/marginal_trend.c
ISAS := sse2 avx2

MAIN := src/command/main.c
SOURCES := $(filter-out $(MAIN),$(wildcard src/*/*.c models/*.c))
ISA_PRESENT := $(filter $(ISA_SOURCES),$(SOURCES))
PLAIN := $(filter-out $(ISA_SOURCES),$(SOURCES))
ASSETS := $(wildcard src/report/page.css src/report/page.js)
OBJECTS := $(PLAIN:%.c=$(O)/%.o) \
    $(foreach isa,$(ISAS),$(ISA_PRESENT:%.c=$(O)/%.$(isa).o)) \
    $(if $(ASSETS),$(O)/gen/page_assets.o) $(O)/gen/source_digest.o
HEADERS := $(wildcard src/*/*.h models/*.h)

TEST_SOURCES := $(wildcard tests/unit/test_*.c)
TEST_HELPERS := $(filter-out $(TEST_SOURCES),$(wildcard tests/unit/*.c))
TEST_PROGRAMS := $(TEST_SOURCES:tests/unit/%.c=$(O)/tests/unit/%)
# The program with one failing call (tests/inject). Sanitizers have an allocator of their own.
INJECTED := $(if $(SAN),,$(O)/tests/inject/terrace)
FUZZ_TARGETS := $(patsubst tests/fuzz/fuzz_%.c,%,$(wildcard tests/fuzz/fuzz_*.c))
TEST_PROGRAMS += $(FUZZ_TARGETS:%=$(O)/tests/fuzz/replay_%)
BENCH_PROGRAMS := $(patsubst tests/bench/%.c,$(O)/tests/bench/%,$(wildcard tests/bench/*.c))
FORMATTED := $(wildcard src/*/*.[ch] models/*.[ch] tests/*/*.[ch])

.PHONY: all programs demo test golden-redo bench install headers floors floors-update format format-fix \
    lengths lint valgrind cover dist fuzz fuzz-run clean FORCE
.SECONDARY:
.DELETE_ON_ERROR:

all: $(BUILD)/terrace $(BUILD)/libterrace.a $(BUILD)/terrace.1 $(BUILD)/terrace.bash
programs: all $(TEST_PROGRAMS) $(BENCH_PROGRAMS) $(INJECTED)

# Objects are made anew when the flags change; what stands in build/ when the variant does.
# $(call stamp,text): rewrites the target only when the text is another one.
stamp = mkdir -p $(@D) && echo '$(1)' | cmp -s - $@ || echo '$(1)' > $@
$(O)/.flags: FORCE
	@$(call stamp,$(CC) $(CPPFLAGS) $(FLAGS) $(LDFLAGS) $(LDLIBS))
$(BUILD)/.variant: FORCE
	@$(call stamp,$(O))

$(O)/%.o: %.c $(O)/.flags
	@mkdir -p $(@D)
	@echo "  CC    $@"
	$(Q)$(CC) $(CPPFLAGS) $(FLAGS) -MMD -MP -c -o $@ $<

define isa_rule
$(O)/%.$(1).o: %.c $(O)/.flags
	@mkdir -p $$(@D)
	@echo "  CC    $$@"
	$$(Q)$(CC) $(CPPFLAGS) $(FLAGS) -O3 -Wno-psabi -DISA=$(1) -m$(1) -MMD -MP -c -o $$@ $$<
endef
$(foreach isa,$(ISAS),$(eval $(call isa_rule,$(isa))))

# page.css and page.js as text inside the program.
$(GEN)/page_assets.c: $(ASSETS) tests/workshop/embed.sh
	@mkdir -p $(@D)
	@echo "  TEXT  $@"
	$(Q)sh tests/workshop/embed.sh report/page.h $(ASSETS) > $@
# The digest of all sources: made every time, written when it is another one.
$(GEN)/source_digest.c: FORCE
	@mkdir -p $(@D)
	@sh tests/workshop/source_hash.sh --c > $@.new
	@if cmp -s $@.new $@; then rm $@.new; else mv $@.new $@; fi
$(O)/gen/%.o: $(GEN)/%.c $(O)/.flags
	@mkdir -p $(@D)
	@echo "  CC    $@"
	$(Q)$(CC) $(CPPFLAGS) $(FLAGS) -MMD -MP -c -o $@ $<

# The list of members is a prerequisite, so that a deleted source leaves the library too.
$(O)/.members: FORCE
	@$(call stamp,$(OBJECTS))
$(O)/libterrace.a: $(OBJECTS) $(O)/.members
	@echo "  AR    $@"
	@rm -f $@
	$(Q)ar rcs $@ $(OBJECTS)
$(O)/terrace: $(O)/$(MAIN:.c=.o) $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) -o $@ $^ $(LDLIBS)
$(BUILD)/terrace $(BUILD)/libterrace.a: $(BUILD)/%: $(O)/% $(BUILD)/.variant
	@cp $< $@.new && mv $@.new $@

$(O)/tests/unit/test_%: $(O)/tests/unit/test_%.o $(TEST_HELPERS:%.c=$(O)/%.o) $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) -o $@ $^ $(CUNIT_LIBS) $(LDLIBS)
$(O)/tests/unit/%.o: CPPFLAGS += -Itests/unit
# A fuzz target with libFuzzer's main, and with our own, which reads the committed corpus.
FUZZ_SHARED := $(O)/tests/fuzz/fuzz.o $(O)/tests/unit/schema_takes.o
$(O)/tests/fuzz/fuzz_%: $(O)/tests/fuzz/fuzz_%.o $(FUZZ_SHARED) $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) -fsanitize=fuzzer -o $@ $^ $(CUNIT_LIBS) $(LDLIBS)
$(O)/tests/fuzz/replay_%: $(O)/tests/fuzz/fuzz_%.o tests/fuzz/replay.c $(FUZZ_SHARED) $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(CPPFLAGS) $(FLAGS) $(LDFLAGS) -DCORPUS='"tests/fuzz/corpus/$*"' -o $@ $^ $(CUNIT_LIBS) $(LDLIBS)
# --wrap hands these calls of the program's own objects to inject.c.
INJECT_WRAPPED := base_init _exit open openat read write fsync close renameat linkat unlinkat mkdir rmdir \
    stat fstat fstatat fcntl fwrite fflush
$(O)/tests/inject/inject.o: FLAGS += -Wno-missing-prototypes -Wno-pedantic -fno-builtin
$(O)/tests/inject/terrace: $(O)/$(MAIN:.c=.o) $(O)/tests/inject/inject.o $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) $(INJECT_WRAPPED:%=-Wl,--wrap=%) -o $@ $^ $(LDLIBS)
$(O)/tests/bench/%: $(O)/tests/bench/%.o $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) -o $@ $^ $(LDLIBS)

-include $(wildcard $(O)/*/*.d $(O)/*/*/*.d)

# The manual page and the completion, from the table of commands.
$(O)/tests/manual/write_manual: $(O)/tests/manual/write_manual.o $(O)/libterrace.a
	@echo "  LINK  $@"
	$(Q)$(CC) $(FLAGS) $(LDFLAGS) -o $@ $^ $(LDLIBS)
$(BUILD)/terrace.1: $(O)/tests/manual/write_manual $(BUILD)/.variant
	@$< page > $@.new && mv $@.new $@
$(BUILD)/terrace.bash: $(O)/tests/manual/write_manual $(BUILD)/.variant
	@$< completion > $@.new && mv $@.new $@

# ---- work ------------------------------------------------------------------------------------

# Scripts find the program under test in TERRACE.
test: all $(TEST_PROGRAMS) $(INJECTED)
	@TERRACE="$(abspath $(BUILD)/terrace)" INJECTED="$(abspath $(INJECTED))" CC="$(CC)" TEST_PROGRAMS="$(TEST_PROGRAMS)" tests/run

FUZZ := $(MAKE) --no-print-directory CC=clang SAN=address,undefined,fuzzer-no-link CFLAGS='-O1 -g'
fuzz:
	+@$(FUZZ) fuzz-run
fuzz-run: $(FUZZ_TARGETS:%=$(O)/tests/fuzz/fuzz_%)
	@sh tests/workshop/fuzz.sh $(BUILD)/fuzz $^

# After a change that is meant to change results: the commit says why.
golden-redo: all
	tests/golden/golden.sh --redo

bench: $(BENCH_PROGRAMS)
	@for b in $(BENCH_PROGRAMS); do $$b || exit 1; done

# DEMO: examples, directories of data_examples/.
DEMO := itch antibiotic_days
demo: all
	@set -e; for d in $(DEMO); do \
	    in=data_examples/$$d; out=$(BUILD)/demo/$$d; mkdir -p $(BUILD)/demo; \
	    echo "== terrace check $$in/design.json"; \
	    $(BUILD)/terrace check $$in/design.json; \
	    echo "== terrace analyze $$in/design.json $$in/interim.csv"; \
	    $(BUILD)/terrace analyze $$in/design.json $$in/interim.csv --out $$out --force; \
	done
	@echo; echo "The reports:"; for d in $(DEMO); do echo "  $(BUILD)/demo/$$d/report.html"; done

install: all
	install -d $(DESTDIR)$(PREFIX)/bin $(DESTDIR)$(PREFIX)/lib
	install -m 755 $(BUILD)/terrace $(DESTDIR)$(PREFIX)/bin/terrace
	install -m 644 $(BUILD)/libterrace.a $(DESTDIR)$(PREFIX)/lib/libterrace.a
	install -d $(DESTDIR)$(PREFIX)/share/man/man1 $(DESTDIR)$(PREFIX)/share/bash-completion/completions
	install -m 644 $(BUILD)/terrace.1 $(DESTDIR)$(PREFIX)/share/man/man1/terrace.1
	install -m 644 $(BUILD)/terrace.bash $(DESTDIR)$(PREFIX)/share/bash-completion/completions/terrace
	@set -e; for h in $(HEADERS); do f=$(DESTDIR)$(PREFIX)/include/terrace/$${h#src/}; \
	    install -d "$${f%/*}"; install -m 644 $$h "$$f"; done

headers:
	@FLAGS="$(CPPFLAGS) $(FIXED) $(WARNINGS)" sh tests/workshop/headers.sh $(HEADERS)
floors:
	@bash tests/workshop/floors.sh
floors-update:
	@bash tests/workshop/floors.sh --update
format:
	@clang-format --dry-run -Werror $(FORMATTED) && echo "format: $(words $(FORMATTED)) files"
format-fix:
	clang-format -i $(FORMATTED)
lengths:
	@sh tests/workshop/lengths.sh $(FORMATTED)
lint:
	@FLAGS="$(CPPFLAGS)" FIXED="$(FIXED)" ISA_SOURCES="$(ISA_PRESENT)" \
	    sh tests/workshop/lint.sh $(PLAIN) $(MAIN)
valgrind: all
	@bash tests/workshop/valgrind.sh $(BUILD)/terrace
# Tests with counters compiled in (FAST), then what they reached.
cover:
	+@$(MAKE) --no-print-directory test FAST=1 BUILD=$(BUILD)/cover CFLAGS="-O0 -g --coverage" LDFLAGS=--coverage
	@bash tests/workshop/cover.sh $(BUILD)/cover/obj
dist:
	@bash tests/workshop/dist.sh $(BUILD)
clean:
	rm -rf $(BUILD)

endif
