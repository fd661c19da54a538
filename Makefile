# Busloom's make targets; "make" alone lists them.
GO ?= go
FUZZTIME ?= 10000x
LONGFUZZ ?= 60s
BIN := bin/busloom

.DEFAULT_GOAL := help
.PHONY: help need-go build demo test unit lint current fuzz fuzz-short bench generate clean

help: ## list the targets
	@awk -F':.*## ' '/^[a-z-]+:.*## /{printf "  make %-12s %s\n", $$1, $$2}' $(MAKEFILE_LIST)

need-go:
	@command -v $(GO) >/dev/null 2>&1 || { echo "busloom needs Go 1.26 or later: the command '$(GO)' was not found" >&2; exit 1; }

build: need-go ## build bin/busloom
	@mkdir -p bin
	@$(GO) build -o $(BIN) ./cmd/busloom

demo: build ## check Heron's description, decode the wet stop, show what to try next
	@sh scripts/demo.sh $(BIN)

test: need-go lint current unit fuzz-short ## everything that must pass before a change lands
	@echo "make test: all passed"

unit: need-go ## vet, all tests under the race detector, layering check, command scripts
	$(GO) vet ./...
	$(GO) test -race ./...
	@# These run other programs, which the test cache knows nothing of.
	$(GO) test -count=1 . ./cmd/busloom

lint: need-go ## gofmt, staticcheck, govulncheck
	@out=$$(gofmt -l $$(git ls-files '*.go' 2>/dev/null || find . -name '*.go')); if [ -n "$$out" ]; then echo "not formatted (run gofmt -w):" $$out >&2; exit 1; fi
	$(GO) tool staticcheck ./...
	@sh scripts/vulncheck.sh $(GO)

current: need-go ## check that generated files are current
	@sh scripts/current.sh $(GO)

generate: need-go ## make the generated files anew: Heron's captures
	@sh scripts/generate.sh $(GO) .

fuzz-short: need-go
	@sh scripts/fuzz.sh $(GO) $(FUZZTIME)

fuzz: need-go ## fuzz each target for LONGFUZZ (60s)
	@sh scripts/fuzz.sh $(GO) $(LONGFUZZ)

bench: build ## speed as ratios, measured side by side in one run
	@$(GO) run ./bench -busloom $(BIN)

clean: ## remove what was built
	rm -rf bin
