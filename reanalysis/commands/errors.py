"""Errors on a terminal: every problem, no traceback."""

from __future__ import annotations

import sys

from reanalysis.errors import ReanalysisError


def print_error(study: str, error: ReanalysisError) -> None:
    """Print every problem of an error to standard error."""
    count = len(error.problems)
    sys.stderr.write(f"{study}: {count} problem{'s' if count != 1 else ''}\n")
    for problem in error.problems:
        lines = str(problem).splitlines()
        sys.stderr.write("".join(f"  {line}\n" for line in lines))
