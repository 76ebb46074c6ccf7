"""The machine-readable files of a study's folder: JSON and CSV."""

from __future__ import annotations

import csv
import io
import json
import os
import platform
from collections.abc import Mapping

from reanalysis.analysis.result import Analysis
from reanalysis.report import schema
from reanalysis.report.results import library_versions

CSV_COLUMNS = (
    "kind", "name", "unit", "analysis", "prior_set", "estimate", "low", "high", "level",
    "se_or_sd", "p", "prob_positive", "prob_direction", "prob_beyond", "note",
)  # fmt: skip
"""Head of `estimates.csv`; an estimate is the posterior median on the Bayesian side."""

_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def results_json(results: schema.Results) -> str:
    """Return `results.json`, in full double precision."""
    return results.model_dump_json(indent=1) + "\n"


def provenance_json(analysis: Analysis, seconds: Mapping[str, float]) -> str:
    """Return `provenance.json`: what depends on the machine and the clock."""
    prepared = analysis.prepared
    record = {
        "study_file": str(prepared.study.path),
        "data_file": str(prepared.study.data_path),
        "study_sha256": prepared.study.sha256,
        "data_sha256": prepared.source.sha256,
        "versions": library_versions(),
        "python": platform.python_version(),
        "platform": platform.platform(),
        "processors": os.cpu_count(),
        "seconds": {name: round(value, 3) for name, value in seconds.items()},
    }
    return json.dumps(record, indent=1, ensure_ascii=False) + "\n"


def results_schema() -> dict[str, object]:
    """Return the JSON Schema of `results.json`."""
    return schema.Results.model_json_schema()


def estimates_csv(results: schema.Results) -> str:
    """Return `estimates.csv`: one row for each coefficient or question, analysis and prior set."""
    buffer = io.StringIO()
    writer = csv.DictWriter(buffer, CSV_COLUMNS, restval="", lineterminator="\n")
    writer.writeheader()
    for coefficient in results.coefficients:
        head = {"kind": "coefficient", "name": coefficient.term, "unit": coefficient.unit}
        writer.writerow(_safe(head | _frequentist(coefficient.frequentist)))
        for name, part in coefficient.posterior.items():
            writer.writerow(_safe(head | _posterior(name, part)))
    for question in results.questions:
        head = {"kind": "question", "name": question.name, "unit": question.unit}
        level = {"level": results.study.level}
        writer.writerow(_safe(head | level | _frequentist(question.frequentist)))
        for name, answer in question.posterior.items():
            writer.writerow(_safe(head | level | _posterior(name, answer)))
    return buffer.getvalue()


def _frequentist(
    part: schema.EstimatePart | schema.FrequentistAnswerPart | schema.AbsentPart,
) -> dict[str, object]:
    if isinstance(part, schema.AbsentPart):
        return {"analysis": "frequentist", "note": part.reason}
    row: dict[str, object] = {"analysis": "frequentist", "estimate": part.estimate, "low": part.low}
    row |= {"high": part.high, "se_or_sd": part.se, "p": part.p}
    return row | ({"level": part.level} if isinstance(part, schema.EstimatePart) else {})


def _posterior(
    name: str, part: schema.MarginalPart | schema.PosteriorAnswerPart | schema.AbsentPart
) -> dict[str, object]:
    row: dict[str, object] = {"analysis": "bayesian", "prior_set": name}
    if isinstance(part, schema.AbsentPart):
        return row | {"note": part.reason}
    row |= {"estimate": part.median, "low": part.low, "high": part.high}
    if isinstance(part, schema.MarginalPart):
        return row | {"level": part.level, "se_or_sd": part.sd, "prob_positive": part.prob_positive}
    beyond = "" if part.prob_beyond is None else part.prob_beyond
    return row | {"prob_direction": part.prob_direction, "prob_beyond": beyond}


def _safe(row: dict[str, object]) -> dict[str, object]:
    """Keep a spreadsheet from running a label as a formula."""
    return {
        key: f"'{value}" if isinstance(value, str) and value.startswith(_FORMULA_STARTS) else value
        for key, value in row.items()
    }
