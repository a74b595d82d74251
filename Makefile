# Every target that builds asks .ci/setup for the build flags first: it checks Go, installs what is
# missing where it may, and falls back to the plain-Go ridge map where it may not.
# Variables: OPENCV=no builds without OpenCV; ARGS are passed on by accuracy, contours, coverage and bench.

.DEFAULT_GOAL := help
.PHONY: help demo test build accuracy contours coverage bench lint

help: ## list the targets
	@awk -F ':.*## ' '/^[a-z]+:.*## / { printf "make %-10s %s\n", $$1, $$2 }' Makefile

demo: build ## set up, build, measure the demo stack into demo-results/
	@.ci/demo

test: ## set up and run every check
	@.ci/checks

build: ## set up and build bin/wend
	@mkdir -p bin
	@flags=$$(.ci/setup) && go build $$flags -o bin/wend.new ./cmd/wend && mv bin/wend.new bin/wend

accuracy: ## table of contour and stiffness errors against synthetic truth
	@flags=$$(.ci/setup) && go run $$flags ./cmd/wend/internal/accuracy $(ARGS)

contours: ## table of centrelines against truth and against the photon limit
	@flags=$$(.ci/setup) && go run $$flags ./cmd/wend/internal/contours $(ARGS)

coverage: ## how often the 95 % intervals hold the truth
	@flags=$$(.ci/setup) && go run $$flags ./cmd/wend/internal/coverage $(ARGS)

bench: ## benchmarks with their allocations
	@flags=$$(.ci/setup) && go test $$flags -run '^$$' -bench . -benchmem $(ARGS) ./...

lint: ## the checks that run no tests
	@.ci/checks lint
