# Two commands matter: `make run` and `make test`. The rest is for those who work on it.
# The Go release is pinned here and in go.mod: it is the one that govulncheck finds clean (DEVELOPERS.md).

export GOTOOLCHAIN := go1.27.3
SHELL := /bin/bash
.SHELLFLAGS := -euo pipefail -c

TAGS     := sqlite_omit_load_extension
BIN      := bin/crossplumb
LISTEN   ?= 127.0.0.1:8480
ARTEFACTS := artefacts

# Packages with property tests take a seed, so that a run can be had again; try others with SEED=0 (a new one each time).
SEED       ?= 20261201
PROPERTIES := $(shell grep -rl pgregory.net/rapid --include='*_test.go' calc cmd db server static/*.go | xargs -n1 dirname | sort -u | sed 's:^:./:')
PLAIN       = $(shell go list ./... | grep -vxF "$$(printf 'crossplumb/%s\n' $(PROPERTIES:./%=%))")

.PHONY: run build static test test-go test-wasm test-page tools bench calibrate fuzz vuln clean

## run: build everything and serve the demo on this machine only
run: build
	$(BIN) demo --listen $(LISTEN)

## build: bin/crossplumb, with the phone and desk pages inside
build: static
	go build -trimpath -tags $(TAGS) -o $(BIN) ./cmd/crossplumb

## static: the pages, the wasm, their compressed forms and the weight report
static: static/node_modules/.lock-stamp
	go run ./cmd/mkstatic

static/node_modules/.lock-stamp: static/package.json static/package-lock.json
	npm ci --prefix static --no-audit --no-fund
	touch $@

## test: everything, with the tools it needs
test: tools build
	@mkdir -p $(ARTEFACTS)
	$(MAKE) --no-print-directory test-go
	$(MAKE) --no-print-directory test-wasm
	$(MAKE) --no-print-directory test-page

test-go:
	go vet -tags $(TAGS) ./...
	GOOS=js GOARCH=wasm go vet ./cmd/phonecalc
	@mkdir -p $(ARTEFACTS)
	.ci/gotest native $(ARTEFACTS)/go-test.txt -tags $(TAGS) $(PLAIN)
	.ci/gotest properties $(ARTEFACTS)/go-properties.txt -tags $(TAGS) $(PROPERTIES) -rapid.seed=$(SEED)

# The same golden files as above, read by the code as the phone runs it.
test-wasm:
	@mkdir -p $(ARTEFACTS)
	PATH="$$(go env GOROOT)/lib/wasm:$$PATH" GOOS=js GOARCH=wasm .ci/gotest wasm $(ARTEFACTS)/wasm-test.txt \
	  -exec="$$(pwd)/.ci/wasmexec" -run Golden ./calc/wire

test-page:
	npx --prefix static tsc --noEmit -p static
	CROSSPLUMB_BIN=$$(pwd)/$(BIN) ARTEFACTS=$$(pwd)/$(ARTEFACTS) node --test --test-concurrency=1 static/e2e/

## tools: what the tests need beyond Go, gcc, make and Node; installed only where missing
tools:
	.ci/tools

## bench: ours beside a yardstick in numpy and scipy (Debian: python3-numpy python3-scipy), in the same run
bench: tools build
	@/usr/bin/python3 -c 'import numpy, scipy' || { echo "make bench needs python3-numpy and python3-scipy (Debian packages)" >&2; exit 1; }
	go test -run '^$$' -bench . -benchmem -count 3 ./calc/verdict ./calc/stream ./calc/scatter ./calc/fault
	/usr/bin/python3 testdata/yardstick/yardstick.py
	CROSSPLUMB_BIN=$$(pwd)/$(BIN) node --test static/bench/verdict.mjs
	go test -tags $(TAGS) -run '^$$' -bench . ./db

## calibrate: ten thousand simulated mounts with known truth, judged; prints the table (an hour or so)
calibrate:
	go test ./calc/verdict -run '^TestCalibration$$' -v -timeout 6h -calibrate 10000

## fuzz: every operation behind the door, FUZZTIME each; what is found is kept as a seed
FUZZTIME ?= 30m
fuzz:
	for target in $$(grep -ho '^func Fuzz[A-Za-z]*' calc/wire/*_test.go | cut -c6-); do \
	  echo "== $$target"; go test ./calc/wire -run '^$$' -fuzz "^$$target$$" -fuzztime $(FUZZTIME) -timeout 24h; done
	go test ./calc/codec -run '^$$' -fuzz '^FuzzParse$$' -fuzztime $(FUZZTIME) -timeout 24h
	go test -tags $(TAGS) ./server -run '^$$' -fuzz '^FuzzReadEntry$$' -fuzztime $(FUZZTIME) -timeout 24h

## vuln: known vulnerabilities in what we call
vuln:
	.ci/vuln

clean:
	rm -rf bin $(ARTEFACTS) static/node_modules
	find static/gen -mindepth 1 ! -name README.md -delete
