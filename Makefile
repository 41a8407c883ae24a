# keptair: what a developer or a new user can ask for. `make help` lists it.

PYTHON ?= python3
BIN := .venv/bin
INSTALLED := .venv/.installed

.DEFAULT_GOAL := help
.PHONY: help demo test lint types schemas handbook verify fuzz clean

help: ## list these commands
	@grep -hE '^[a-z]+:.*## ' $(MAKEFILE_LIST) | sed -E 's/:.*## /\t/' | expand -t 12

$(INSTALLED): pyproject.toml constraints.txt
	$(PYTHON) -m venv .venv
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --constraint constraints.txt --editable '.[dev]'
	@touch $@

demo: .venv/.demo ## install, run the main job on sample_data, say where table and report are
	$(BIN)/keptair run sample_data/survey.csv --out demo --settings sample_data/settings.toml
	$(BIN)/keptair targets demo --top 10

# The demo needs no test tools, so it does not wait for them.
.venv/.demo: pyproject.toml constraints.txt
	$(PYTHON) -m venv .venv
	$(BIN)/python -m pip install --quiet --disable-pip-version-check --constraint constraints.txt --editable .
	@touch $@

test: $(INSTALLED) lint types ## install and run the whole suite, lint and types included
	$(BIN)/python -m pytest

lint: $(INSTALLED) ## style and common mistakes
	$(BIN)/ruff check .
	$(BIN)/ruff format --check .

types: $(INSTALLED) ## strict types
	$(BIN)/mypy

schemas: $(INSTALLED) ## check the schemas and write the data dictionary, schemas/README.md
	$(BIN)/python -m keptair.tables.dictionary

handbook: $(INSTALLED) ## checks against published values: source, expected, obtained, tolerance
	PYTHONPATH=tests $(BIN)/python -m handbook

verify: $(INSTALLED) ## the Solar System through the default settings
	$(BIN)/keptair verify

fuzz: $(INSTALLED) ## ten minutes of hostile input against reader, column map and screen
	PYTHONPATH=tests $(BIN)/python -m fuzz --seconds 600

clean: ## remove what the commands above made
	rm -rf .venv demo build dist .pytest_cache .mypy_cache .ruff_cache .hypothesis
	find . -name __pycache__ -type d -prune -exec rm -rf {} +
