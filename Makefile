# Two commands matter: `make run` and `make test`. The rest is for those who work on it.
# The Go release is pinned here and in go.mod: it is the one that govulncheck finds clean (DEVELOPERS.md).

export GOTOOLCHAIN := go1.27.3
SHELL := /bin/bash
.SHELLFLAGS := -euo pipefail -c

TAGS     := sqlite_omit_load_extension
BIN      := bin/crossplumb
LISTEN   ?= 127.0.0.1:8480
ARTEFACTS := artefacts

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
	.ci/gotest native $(ARTEFACTS)/go-test.txt -tags $(TAGS) ./...

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

## vuln: known vulnerabilities in what we call
vuln:
	.ci/vuln

clean:
	rm -rf bin $(ARTEFACTS) static/node_modules
	find static/gen -mindepth 1 ! -name README.md -delete
