# What a person and CI run. Plain `make` prints the list.
#
#   make report STUDIES="my/*.toml" OUT=somewhere   other studies, another folder
#   make test TESTS=tests/design                    some of the tests
#   make report PYTHON=/path/to/python3.12          the interpreter that .venv is made from (after `make clean`)

VENV    := .venv
STAMP   := $(VENV)/set-up-done
RUN     := $(VENV)/bin/python -m
STUDIES ?= sample_data/*.toml
OUT     ?= out
TESTS   ?= tests
UV      ?= uv

.DEFAULT_GOAL := help
.PHONY: help report test check bench lock clean again

help:
	@echo "make report   reports of the sample studies, in $(OUT)/"
	@echo "make test     all tests"
	@echo "make check    lint, format, types, layers and sizes"
	@echo "make bench    time whole commands, and many studies against the plain loop"
	@echo "make lock     resolve requirements.lock anew from pyproject.toml (needs uv)"
	@echo "make clean    remove .venv, reports and caches"

# The stamp holds the folder that .venv was made in: a moved or copied checkout sets itself up anew.
$(STAMP): requirements.lock pyproject.toml .ci/set-up $(if $(filter-out $(file <$(STAMP)),$(CURDIR)),again)
	@PYTHON='$(PYTHON)' sh .ci/set-up $(VENV)

report: $(STAMP)
	$(VENV)/bin/reanalysis report $(STUDIES) --out $(OUT)

test: $(STAMP)
	$(RUN) pytest $(TESTS)

check: $(STAMP)
	$(RUN) ruff check .
	$(RUN) ruff format --check .
	$(RUN) mypy
	$(RUN) pytest -q tests/test_layers.py tests/test_sizes.py

bench: $(STAMP)
	$(RUN) benchmarks.commands
	$(RUN) benchmarks.throughput

# Versions come from the registry that your client is set up for; no address is written into the lock.
lock:
	@command -v $(UV) >/dev/null || { echo "make lock needs uv: install it, or say make lock UV=/path/to/uv" >&2; exit 1; }
	$(UV) pip compile --quiet pyproject.toml --group dev --generate-hashes --universal --python-version 3.12 \
	    --no-header --no-emit-index-url --no-emit-find-links --output-file requirements.lock

clean:
	rm -rf $(VENV) $(OUT) .hypothesis .mypy_cache .ruff_cache .pytest_cache
	find . -name __pycache__ -type d -prune -exec rm -rf {} +
