"""The formats of a report; light, so that the command line can name them."""

from __future__ import annotations

NAMES = {"html": "report.html", "pdf": "report.pdf", "json": "results.json", "csv": "estimates.csv"}
"""File of each format; `provenance.json` is always written."""

FORMATS = tuple(NAMES)

PAGES = ("html", "pdf")
"""Formats that are laid out, and may be rendered elsewhere."""
