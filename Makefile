# Trammel. `make demo` and `make check` install what is missing, build and run; `make help` lists the rest.

ifeq ($(origin CC),default)
CC := gcc
endif
ifeq ($(origin CXX),default)
CXX := g++
endif
CLANG   ?= clang
PYTHON  ?= /usr/bin/python3
PREFIX  ?= /usr/local
BUILD   ?= build
OPT     ?= -O3
SAN     ?=
JOBS    ?= $(shell nproc)
FUZZ_SECONDS ?= 10

VERSION := $(shell sed -n 's/^.define TML_VERSION "\(.*\)"/\1/p' include/trammel/trammel.h)
SONAME  := libtrammel.so.$(firstword $(subst ., ,$(VERSION)))

WARN    := -Wall -Wextra -Wshadow -Wvla -Wstrict-prototypes -Wmissing-prototypes -Wpointer-arith -Wundef
override CFLAGS += -std=c17 -D_POSIX_C_SOURCE=200809L -g $(OPT) $(WARN) -fPIC -fopenmp -ffp-contract=off -fno-math-errno \
                   -fno-trapping-math -Iinclude -Isrc $(SAN)
override LDLIBS += -llapacke -lopenblas -ljansson -lz -lm
override LDFLAGS += -fopenmp $(SAN)

LIB_SRC := $(filter-out src/cli/%,$(wildcard src/*/*.c))
CLI_SRC := $(wildcard src/cli/*.c)
LIB_OBJ := $(LIB_SRC:src/%.c=$(BUILD)/obj/%.o)
CLI_OBJ := $(CLI_SRC:src/%.c=$(BUILD)/obj/%.o)
LIB     := $(BUILD)/libtrammel.a

# tests/*.c are Criterion programs; tests/oracle/*.c and *.cpp compare with outside references, or help the scripts there that
# do; tests/bench/*.c measure; tests/inject/*.c fail allocations; tests/fuzz/*.c are libFuzzer targets.
TESTS   := $(patsubst tests/%.c,$(BUILD)/tests/%,$(wildcard tests/*.c))
ORACLES := $(patsubst tests/oracle/%.c,$(BUILD)/oracle/%,$(wildcard tests/oracle/*.c)) \
           $(patsubst tests/oracle/%.cpp,$(BUILD)/oracle/%,$(wildcard tests/oracle/*.cpp))
BENCHES := $(patsubst tests/bench/%.c,$(BUILD)/bench/%,$(wildcard tests/bench/*.c))
INJECTS := $(patsubst tests/inject/%.c,$(BUILD)/inject/%,$(wildcard tests/inject/*.c))
FUZZES  := $(patsubst tests/fuzz/%.c,$(BUILD)/fuzz/%,$(wildcard tests/fuzz/*.c))

.PHONY: all shared test tests oracles benches injects fuzzes demo check bench soak fuzz lint sanitize install uninstall clean help
.DELETE_ON_ERROR:

all: $(LIB) $(BUILD)/trammel

$(BUILD)/obj/%.o: src/%.c
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) $(CFLAGS_$(subst /,_,$*)) -MMD -MP -c $< -o $@

# The min-plus kernels round upwards or downwards on purpose.
CFLAGS_bounds_minplus := -frounding-math

$(LIB): $(LIB_OBJ)
	@rm -f $@
	ar rcs $@ $^

$(BUILD)/trammel: $(CLI_OBJ) $(LIB)
	$(CC) $^ $(LDFLAGS) $(LDLIBS) -o $@

# The shared library shows what trammel.h declares and nothing else.
$(BUILD)/trammel.map: include/trammel/trammel.h
	@mkdir -p $(@D)
	{ echo '{ global:'; sed 's#/\*.*\*/##; /^ \*/d; /^typedef/d' $< | grep -oE '\btml_[a-z0-9_]+\(' | sort -u | tr '(' ';'; \
	  echo 'local: *; };'; } > $@

shared: $(BUILD)/$(SONAME)
$(BUILD)/$(SONAME): $(LIB_OBJ) $(BUILD)/trammel.map
	$(CC) -shared -Wl,-soname,$(SONAME) -Wl,--version-script=$(BUILD)/trammel.map -Wl,--no-undefined $(LIB_OBJ) \
	  $(LDFLAGS) $(LDLIBS) -o $@

$(BUILD)/trammel.pc: Makefile include/trammel/trammel.h
	@mkdir -p $(@D)
	printf '%s\n' 'prefix=$(PREFIX)' 'libdir=$${prefix}/lib' 'includedir=$${prefix}/include' '' 'Name: trammel' \
	  'Description: Molecular models from limits on interatomic distances' 'Version: $(VERSION)' \
	  'Cflags: -I$${includedir}' 'Libs: -L$${libdir} -ltrammel' 'Libs.private: $(LDLIBS) -lgomp' > $@

# ---- tests ----

$(BUILD)/tests/%: tests/%.c $(LIB)
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP $< $(LIB) $(LDFLAGS) -lcriterion $(LDLIBS) -o $@

$(BUILD)/oracle/%: tests/oracle/%.c $(LIB)
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP $< $(LIB) $(LDFLAGS) $(LDLIBS) -o $@

$(BUILD)/oracle/%: tests/oracle/%.cpp $(LIB)
	@mkdir -p $(@D)
	$(CXX) $(CPPFLAGS) -std=c++17 -O2 -g -Wall -Wextra -Iinclude -Isrc $(SAN) -MMD -MP $< $(LIB) $(LDFLAGS) $(LDLIBS) -o $@

$(BUILD)/bench/%: tests/bench/%.c $(LIB)
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP $< $(LIB) $(LDFLAGS) $(LDLIBS) -o $@

WRAPPED := malloc calloc realloc aligned_alloc strdup strndup free
$(BUILD)/inject/%: tests/inject/%.c $(LIB)
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP $< $(LIB) $(LDFLAGS) $(WRAPPED:%=-Wl,--wrap=%) $(LDLIBS) -o $@

# Made with clang throughout: `make fuzzes BUILD=build/fuzzing CC=clang SAN=…` (see the target fuzz).
$(BUILD)/fuzz/%: tests/fuzz/%.c $(LIB)
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP -fsanitize=fuzzer $< $(LIB) $(LDFLAGS) $(LDLIBS) -o $@

tests: $(TESTS)
oracles: $(ORACLES)
benches: $(BENCHES)
injects: $(INJECTS)
fuzzes: $(FUZZES)

test: all tests
	@set -e; for t in $(TESTS); do echo "== $$t"; $$t; done

# ---- what people run ----

demo:
	@sh scripts/setup.sh build
	@$(MAKE) --no-print-directory -s -j$(JOBS) all
	@BUILD=$(BUILD) sh scripts/demo.sh

CHECK := BUILD=$(BUILD) MAKE='$(MAKE)' PYTHON='$(PYTHON)' CLANG='$(CLANG)' FUZZ_SECONDS=$(FUZZ_SECONDS) $(PYTHON) scripts/check.py
check:
	@sh scripts/setup.sh check || { echo '0 passed, 1 failed'; exit 1; }
	@env -u MAKEFLAGS -u MAKELEVEL $(CHECK)

sanitize:
	@env -u MAKEFLAGS -u MAKELEVEL $(CHECK) sanitize

lint:
	@env -u MAKEFLAGS -u MAKELEVEL $(CHECK) lint

fuzz: FUZZ_SECONDS := 60
fuzz:
	@env -u MAKEFLAGS -u MAKELEVEL $(CHECK) fuzz

# An hour or so: long fuzzing, every allocation failed in turn, many seeds under the sanitizers.
soak: FUZZ_SECONDS := 600
soak:
	@env -u MAKEFLAGS -u MAKELEVEL SOAK=1 $(CHECK) sanitize fuzz inject soak

bench: all benches
	@set -e; for b in $(BENCHES); do echo "== $$b"; $$b; done
	@set -e; for b in $(wildcard tests/bench/*.py); do echo "== $$b"; TRAMMEL_BUILD=$(BUILD) $(PYTHON) $$b; done

install: all shared $(BUILD)/trammel.pc
	install -d $(DESTDIR)$(PREFIX)/bin $(DESTDIR)$(PREFIX)/lib/pkgconfig $(DESTDIR)$(PREFIX)/include/trammel \
	  $(DESTDIR)$(PREFIX)/share/man/man1
	install -m 755 $(BUILD)/trammel $(DESTDIR)$(PREFIX)/bin/trammel
	install -m 644 $(LIB) $(DESTDIR)$(PREFIX)/lib/libtrammel.a
	install -m 644 $(BUILD)/$(SONAME) $(DESTDIR)$(PREFIX)/lib/$(SONAME)
	ln -sf $(SONAME) $(DESTDIR)$(PREFIX)/lib/libtrammel.so
	install -m 644 $(BUILD)/trammel.pc $(DESTDIR)$(PREFIX)/lib/pkgconfig/trammel.pc
	install -m 644 include/trammel/trammel.h $(DESTDIR)$(PREFIX)/include/trammel/trammel.h
	install -m 644 src/cli/trammel.1 $(DESTDIR)$(PREFIX)/share/man/man1/trammel.1

uninstall:
	rm -f $(addprefix $(DESTDIR)$(PREFIX)/,bin/trammel lib/libtrammel.a lib/libtrammel.so lib/$(SONAME) lib/pkgconfig/trammel.pc \
	  include/trammel/trammel.h share/man/man1/trammel.1)
	-rmdir $(DESTDIR)$(PREFIX)/include/trammel 2>/dev/null

clean:
	rm -rf $(BUILD)

help:
	@printf '%s\n' \
	  'make            the library and the program, in $(BUILD)' \
	  'make demo       install what building needs, build, run three small jobs' \
	  'make check      install what testing needs, then every check; ends with the count' \
	  'make test       the unit tests only' \
	  'make sanitize   unit and command tests under address and undefined-behaviour sanitizers' \
	  'make lint       static analysis' \
	  'make fuzz       the fuzz targets, $(FUZZ_SECONDS) s each in check, 60 s here' \
	  'make soak       the long version of sanitize, fuzz and allocation failures' \
	  'make bench      the benchmarks' \
	  'make install    to PREFIX ($(PREFIX)) under DESTDIR; uninstall takes it away' \
	  'make clean      remove $(BUILD)'

-include $(LIB_OBJ:.o=.d) $(CLI_OBJ:.o=.d) $(wildcard $(BUILD)/*/*.d)
