# make demo   the whole path on the built-in invented scenario
# make test   every test; fast ones first
# make lint   formatting, types, import layers
# make bench  speed against stated bounds
# make mutants every change of the demo's emitted texts: is it caught? Takes an hour
# make golden write the expected outputs anew; read the difference before committing it
# make clean  remove everything that was built or installed here

BIN := .venv/bin
PYTEST := $(BIN)/python -m pytest -n 2

.PHONY: demo test lint bench mutants golden clean run develop

demo: run
	$(BIN)/behavgen demo
	@echo
	@echo "Look at behavgen-demo/build/sense_latch/report.html and at the models beside it."

test: develop
	$(PYTEST) -m "not slow"
	$(PYTEST) -m slow

lint: develop
	$(BIN)/ruff check
	$(BIN)/ruff format --check
	$(BIN)/mypy
	$(BIN)/lint-imports

bench: develop
	@failed=0; for bench in tests/benchmarks/bench_*.py; do \
	  $(BIN)/python $$bench || failed=1; \
	done; exit $$failed

mutants: run
	test -d behavgen-demo || $(BIN)/behavgen demo
	$(BIN)/behavgen -C behavgen-demo check --mutants

golden: develop
	$(BIN)/python -m pytest -m "not slow" --update-golden tests/emit tests/report tests/handoff

clean:
	rm -rf .venv build dist behavgen-demo sim_build
	rm -rf .pytest_cache .mypy_cache .ruff_cache .import_linter_cache .hypothesis
	find . -name __pycache__ -type d -prune -exec rm -rf {} +

run develop:
	@.ci/setup $@
