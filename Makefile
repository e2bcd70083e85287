# Everything runs in a virtual environment of the project's own, made on first use.
PYTHON ?= python3
VENV := .venv
BIN := $(VENV)/bin
JOBS ?= 2

.DEFAULT_GOAL := help
.PHONY: help demo test lint campaign errors responses widths explore coverage defects prove eva accept-examples clean

help: ## Show this list.
	@grep -hE '^[a-z-]+:.*##' $(MAKEFILE_LIST) | sed 's/:.*##/:/' | awk -F': ' '{ printf "  make %-16s %s\n", $$1, $$2 }'

$(BIN)/ready: pyproject.toml
	$(PYTHON) -m venv $(VENV)
	$(BIN)/python -m pip install --quiet --upgrade pip
	$(BIN)/python -m pip install -qq --editable '.[dev]'
	touch $@

demo: $(BIN)/ready ## Size, emit and verify every example; filter a photograph with the compiled C.
	$(BIN)/python examples/demo.py

test: $(BIN)/ready ## Run the test suite (under ten minutes on two cores).
	$(BIN)/python -m pytest -n $(JOBS) tests

lint: $(BIN)/ready ## Check style, formatting and types; changes nothing.
	$(BIN)/ruff check
	$(BIN)/ruff format --check
	$(BIN)/mypy

campaign: $(BIN)/ready ## Compare C, reference, oracle and SciPy on thousands of random specs.
	$(BIN)/python tests/campaign $(CAMPAIGN)

errors: $(BIN)/ready ## Look for frames beyond the error bound, by adversarial search on thousands of specs.
	$(BIN)/python tests/campaign/errors.py $(CAMPAIGN)

responses: $(BIN)/ready ## Compare the response fit with nearest and gain (a quarter of an hour).
	$(BIN)/python tests/campaign/responses.py $(CAMPAIGN)

widths: $(BIN)/ready ## Count the bits that exact widths save against the textbook rules.
	$(BIN)/python tests/campaign/widths.py

defects: $(BIN)/ready ## Seed 2,000 defects in the C of the examples: which rungs notice, is the proof sound.
	$(BIN)/python tests/campaign/defects.py $(CAMPAIGN)

prove: $(BIN)/ready ## Prove the C of every example, thoroughly, on all four data models.
	$(BIN)/guardbit prove examples/*.toml --thorough --jobs $(JOBS)

eva: $(BIN)/ready ## Ask Frama-C's Eva for undefined behaviour in the C of every example.
	$(BIN)/python tests/eva

explore: $(BIN)/ready ## Run the property tests on new examples, many more than make test draws.
	GUARDBIT_EXPLORE=1 $(BIN)/python -m pytest -n $(JOBS) tests/arith tests/files tests/fit tests/plan tests/reference tests/spec

coverage: $(BIN)/ready ## Measure line and branch coverage of the package by the test suite.
	$(BIN)/python -m coverage run -m pytest -n $(JOBS) tests
	$(BIN)/python -m coverage combine --quiet
	$(BIN)/python -m coverage report

accept-examples: $(BIN)/ready ## Write the C of the examples again, after a change that is meant.
	rm -rf examples/c
	$(BIN)/guardbit emit examples/*.toml -o examples/c --force

clean: ## Remove the virtual environment and everything that was made here.
	rm -rf $(VENV) demo build dist gen/*.egg-info .pytest_cache .mypy_cache .ruff_cache .hypothesis
