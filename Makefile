# SPDX-License-Identifier: GPL-3.0-or-later
# polewright: analog stages into proved C. `make help` lists what can be made.

VERSION := 0.1.0
PREFIX  ?= /usr/local
DESTDIR ?=
VARIANT ?= release
CC      := gcc
PYTHON  := /usr/bin/python3
JOBS    ?= 2
V       ?= 0
Q_0     := @
Q       := $(Q_$(V))

# ---- Packages that the program, its tests and its targets need (Debian 12) ----

PACKAGES_BUILD := gcc make pkg-config libgsl-dev libyaml-dev libjansson-dev libmd-dev libsndfile1-dev \
                  libmpc-dev libmpfr-dev libgmp-dev
PACKAGES_RUN   := gnuplot-nox
PACKAGES_TEST  := g++ clang libclang-rt-dev git dpkg-dev libcmocka-dev python3 python3-numpy python3-scipy python3-mpmath python3-yaml \
                  python3-jsonschema mandoc lintian debootstrap zsh cmake chromium chromium-driver fonts-dejavu-core \
                  $(if $(shell command -v npm),,npm)
PACKAGES_PART  := gcc-arm-none-eabi libnewlib-arm-none-eabi qemu-system-arm qemu-system-misc \
                  gcc-riscv64-unknown-elf picolibc-riscv64-unknown-elf gcc-avr avr-libc libsimavr-dev libelf1
# From the npm registry, into build/node: the accessibility checker that report.html must satisfy.
NODE_AXE       := axe-core@4.10.3
PACKAGES       := $(PACKAGES_BUILD) $(PACKAGES_RUN) $(PACKAGES_TEST) $(PACKAGES_PART)

# ---- Sources ----

OUT      := build/$(VARIANT)
SOURCES  := $(sort $(wildcard generator/*/*.c))
OBJECTS  := $(SOURCES:%.c=$(OUT)/%.o)
MAIN     := $(OUT)/generator/main.o
UNITS    := $(sort $(wildcard tests/unit/test_*.c))
UNIT_BIN := $(UNITS:tests/unit/%.c=$(OUT)/unit/%)
PROBES   := $(sort $(wildcard tests/outside/probe_*.c))
PROBE_BIN := $(PROBES:tests/outside/%.c=$(OUT)/outside/%)

WARN     := -Wall -Wextra -Wshadow -Wpointer-arith -Wstrict-prototypes -Wvla -Werror
CFLAGS_release := -O2
CFLAGS_debug   := -O0 -g3
CFLAGS_san     := -O1 -g -fsanitize=address,undefined -fno-sanitize-recover=all -fno-omit-frame-pointer
# -ffp-contract=off: the simulated float arithmetic must round every operation on its own.
# -fno-tree-slp-vectorize: gcc 12.2 drops "float32 ? (double)(float)x : x" where it joins two of them.
CFLAGS   := -std=gnu11 $(WARN) -ffp-contract=off -fno-tree-slp-vectorize $(CFLAGS_$(VARIANT)) -Igenerator -Iinclude -Iruntime \
            -DPW_VERSION='"$(VERSION)"' -DPW_PREFIX='"$(PREFIX)"'
LDLIBS   := -lgsl -lgslcblas -lyaml -ljansson -lmd -lsndfile -lmpc -lmpfr -lgmp -lm -lpthread

.DEFAULT_GOAL := all
.PHONY: all help deps demo check check-targets check-all bench sizes install uninstall documents deb dist clean debug san release tests probes

# ---- Building ----

all: build/polewright            ## build/polewright, the program (VARIANT=debug|san|release)

build/polewright: $(OUT)/polewright
	@mkdir -p $(@D)
	@ln -f $< $@

debug san release:               ## build/debug, build/san, build/release: a variant in a folder of its own
	$(MAKE) VARIANT=$@ build/$@/polewright

$(OUT)/polewright: $(MAIN) $(OBJECTS)
	@echo "  link    $@"
	$(Q)$(CC) $(CFLAGS) -o $@ $^ $(LDLIBS)

$(OUT)/%.o: %.c Makefile
	@mkdir -p $(@D)
	@echo "  compile $<"
	$(Q)$(CC) $(CFLAGS) -MMD -MP -c -o $@ $<

$(OUT)/unit/%: tests/unit/%.c $(OBJECTS)
	@mkdir -p $(@D)
	@echo "  build   $@"
	$(Q)$(CC) $(CFLAGS) -MMD -MP -o $@ $< $(OBJECTS) -lcmocka $(LDLIBS)

$(OUT)/outside/%: tests/outside/%.c $(OBJECTS)
	@mkdir -p $(@D)
	@echo "  build   $@"
	$(Q)$(CC) $(CFLAGS) -MMD -MP -o $@ $< $(OBJECTS) $(LDLIBS)

-include $(OBJECTS:.o=.d) $(MAIN:.o=.d) $(UNIT_BIN:=.d) $(PROBE_BIN:=.d)

# ---- First use ----

deps:                            ## installs the Debian packages that are missing; nothing where none is
	@missing=""; for p in $(PACKAGES); do \
	  dpkg-query -W -f='$${Status}' $$p 2>/dev/null | grep -q 'ok installed' || missing="$$missing $$p"; done; \
	if [ -z "$$missing" ]; then echo "deps: nothing is missing"; else \
	  echo "deps: installing$$missing"; \
	  sudo=; [ "$$(id -u)" = 0 ] || sudo=sudo; \
	  $$sudo apt-get update -q && \
	  $$sudo env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends $$missing; fi
	@test -f build/node/node_modules/axe-core/axe.min.js || { echo "deps: installing $(NODE_AXE) into build/node"; \
	  mkdir -p build/node && npm install --prefix build/node --no-audit --no-fund --loglevel=error $(NODE_AXE); } || \
	  { echo "deps: $(NODE_AXE) could not be installed; the accessibility check will be skipped"; test -z "$$CI"; }

demo: all                        ## builds a shipped example and says where to look
	build/polewright build examples/winch-current/stage.yaml -o build/demo
	@echo; echo "Look at build/demo/report.html in a browser, at build/demo/winch_current.h for the interface,"; \
	echo "and at examples/README.md for what to do next."

# ---- Tests ----

tests: $(UNIT_BIN) $(PROBE_BIN)

probes: $(PROBE_BIN)

check: all                       ## the tests, under ten minutes on two cores
	$(MAKE) -j$(JOBS) tests
	$(MAKE) -j$(JOBS) VARIANT=san build/san/polewright
	$(PYTHON) tests/run.py --jobs $(JOBS)

check-all: all                   ## the tests and every target in full
	$(MAKE) -j$(JOBS) tests
	$(MAKE) -j$(JOBS) VARIANT=san build/san/polewright
	$(PYTHON) tests/run.py --jobs $(JOBS) --full

# ---- Measuring ----

bench: all probes                ## what emitted code costs on every part, beside the yardstick; generator time
	$(PYTHON) tests/bench/bench.py
	$(PYTHON) tests/bench/twin_speed.py

bench-write: all probes          ## the same, and pins it: tests/bench/table.md and counts.json
	$(PYTHON) tests/bench/bench.py --write

check-targets: all probes        ## emitted stages on every part under its emulator, all of them
	PW_FULL=1 $(PYTHON) tests/targets/test_targets.py

sizes: all                       ## the size of the program and of each runtime file
	@size build/polewright; for f in runtime/*.c; do \
	  $(CC) -std=c99 -Os -Iruntime -Iinclude/polewright -c -o $(OUT)/size.o $$f && size $(OUT)/size.o | tail -n 1; done

# ---- Installing ----

SHARE = $(DESTDIR)$(PREFIX)/share
LIBDIR ?= lib
LIB   = $(DESTDIR)$(PREFIX)/$(LIBDIR)
DOCS := $(OUT)/documents

$(OUT)/make-documents: $(OUT)/generator/documents.o $(OBJECTS)
	@echo "  link    $@"
	$(Q)$(CC) $(CFLAGS) -o $@ $^ $(LDLIBS)

RUNTIME_OBJECTS := $(patsubst runtime/%.c,$(OUT)/runtime/%.o,$(sort $(wildcard runtime/*.c)))

$(OUT)/runtime/%.o: runtime/%.c Makefile
	@mkdir -p $(@D)
	@echo "  compile $<"
	$(Q)$(CC) -std=c99 -O2 -fPIC -ffp-contract=off -Wall -Wextra -Wconversion -pedantic -Werror -Iruntime -Iinclude -Iinclude/polewright -c -o $@ $<

$(OUT)/libpolewright-runtime.a: $(RUNTIME_OBJECTS)
	@rm -f $@
	$(Q)$(AR) rcsD $@ $^

documents: $(OUT)/make-documents ## build/release/documents: manual pages, completions, schema, made from the tables
	@mkdir -p $(DOCS)
	$(OUT)/make-documents $(DOCS)

install: all documents $(OUT)/libpolewright-runtime.a          ## installs under PREFIX (default /usr/local), below DESTDIR where given
	install -D -m 755 build/polewright $(DESTDIR)$(PREFIX)/bin/polewright
	install -d $(SHARE)/polewright/runtime/kernels $(SHARE)/polewright/include
	install -m 644 runtime/*.[ch] $(SHARE)/polewright/runtime/
	install -m 644 runtime/kernels/* $(SHARE)/polewright/runtime/kernels/
	cp -R include/polewright $(SHARE)/polewright/include/
	cp -R targets $(SHARE)/polewright/
	install -d $(DESTDIR)$(PREFIX)/include/polewright $(LIB)/pkgconfig $(LIB)/cmake/polewright-runtime
	install -m 644 include/polewright/*.h runtime/*.h $(DESTDIR)$(PREFIX)/include/polewright/
	install -m 644 $(OUT)/libpolewright-runtime.a $(LIB)/
	sed -e 's|@PREFIX@|$(PREFIX)|' -e 's|@LIBDIR@|$(LIBDIR)|' -e 's|@VERSION@|$(VERSION)|' generator/packaging/polewright-runtime.pc.in \
	  > $(LIB)/pkgconfig/polewright-runtime.pc
	sed -e 's|@PREFIX@|$(PREFIX)|' -e 's|@LIBDIR@|$(LIBDIR)|' -e 's|@VERSION@|$(VERSION)|' generator/packaging/polewright-runtime-config.cmake.in \
	  > $(LIB)/cmake/polewright-runtime/polewright-runtime-config.cmake
	install -m 644 $(DOCS)/polewright-stage.schema.json $(SHARE)/polewright/
	install -D -m 644 $(DOCS)/polewright.1 $(SHARE)/man/man1/polewright.1
	install -D -m 644 $(DOCS)/polewright-stage.5 $(SHARE)/man/man5/polewright-stage.5
	install -D -m 644 $(DOCS)/polewright.bash $(SHARE)/bash-completion/completions/polewright
	install -D -m 644 $(DOCS)/_polewright $(SHARE)/zsh/site-functions/_polewright

uninstall:                       ## removes what install put there
	rm -f $(DESTDIR)$(PREFIX)/bin/polewright $(SHARE)/man/man1/polewright.1 $(SHARE)/man/man5/polewright-stage.5 \
	  $(SHARE)/bash-completion/completions/polewright $(SHARE)/zsh/site-functions/_polewright
	rm -rf $(SHARE)/polewright $(DESTDIR)$(PREFIX)/include/polewright $(LIB)/cmake/polewright-runtime
	rm -f $(LIB)/libpolewright-runtime.a $(LIB)/pkgconfig/polewright-runtime.pc

deb: all                         ## build/deb/polewright_*.deb, a Debian package
	@mkdir -p build/deb
	sh generator/packaging/make-deb.sh $(VERSION) build/deb

dist:                            ## build/polewright-VERSION.tar.gz, the same bytes for the same commit
	@mkdir -p build
	git archive --format=tar --prefix=polewright-$(VERSION)/ HEAD | gzip -9n > build/polewright-$(VERSION).tar.gz
	@ls -l build/polewright-$(VERSION).tar.gz

# ---- Housekeeping ----

clean:                           ## removes build/
	rm -rf build

help:                            ## this list
	@grep -hE '^[a-z][a-zA-Z -]*:.*##' $(MAKEFILE_LIST) | sed -E 's/:[^#]*##/\t/' | expand -t 24
