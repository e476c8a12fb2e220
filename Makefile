# Trammel. `make demo` and `make check` install what is missing, build and run; `make help` lists the rest.

ifeq ($(origin CC),default)
CC := gcc
endif
PYTHON  ?= /usr/bin/python3
PREFIX  ?= /usr/local
BUILD   ?= build
OPT     ?= -O3
SAN     ?=

WARN    := -Wall -Wextra -Wshadow -Wvla -Wstrict-prototypes -Wmissing-prototypes -Wpointer-arith -Wundef
CFLAGS  += -std=c17 -D_POSIX_C_SOURCE=200809L -g $(OPT) $(WARN) -fPIC -fopenmp -ffp-contract=off -fno-math-errno \
           -fno-trapping-math -Iinclude -Isrc $(SAN)
LDLIBS  += -llapacke -lopenblas -ljansson -lz -lm
LDFLAGS += -fopenmp $(SAN)

LIB_SRC := $(filter-out src/cli/%,$(wildcard src/*/*.c))
CLI_SRC := $(wildcard src/cli/*.c)
LIB_OBJ := $(LIB_SRC:src/%.c=$(BUILD)/obj/%.o)
CLI_OBJ := $(CLI_SRC:src/%.c=$(BUILD)/obj/%.o)
TEST_SRC := $(wildcard tests/*.c)
TESTS   := $(TEST_SRC:tests/%.c=$(BUILD)/tests/%)

.PHONY: all clean test
all: $(BUILD)/libtrammel.a $(if $(wildcard src/ensemble/build.c),$(BUILD)/trammel,$(CLI_OBJ))

$(BUILD)/obj/%.o: src/%.c
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) $(CFLAGS_$(subst /,_,$*)) -MMD -MP -c $< -o $@

# The min-plus kernels round upwards or downwards on purpose.
CFLAGS_bounds_minplus := -frounding-math

$(BUILD)/libtrammel.a: $(LIB_OBJ)
	@rm -f $@
	ar rcs $@ $^

$(BUILD)/trammel: $(CLI_OBJ) $(BUILD)/libtrammel.a
	$(CC) $(LDFLAGS) $^ $(LDLIBS) -o $@

$(BUILD)/tests/%: tests/%.c $(BUILD)/libtrammel.a
	@mkdir -p $(@D)
	$(CC) $(CPPFLAGS) $(CFLAGS) -MMD -MP $< $(BUILD)/libtrammel.a $(LDFLAGS) -lcriterion $(LDLIBS) -o $@

test: all $(TESTS)
	@set -e; for t in $(TESTS); do echo "== $$t"; $$t; done

clean:
	rm -rf $(BUILD)

-include $(LIB_OBJ:.o=.d) $(CLI_OBJ:.o=.d) $(TESTS:=.d)
