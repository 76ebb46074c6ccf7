"""Exit codes of the command line."""

from __future__ import annotations

EXIT_OK = 0
"""All sound."""

EXIT_UNSOUND = 1
"""Some study failed, or its computation is not sound."""

EXIT_INVALID = 2
"""Wrong usage or invalid input."""

EXIT_STOPPED = 130
"""Stopped by the user."""
