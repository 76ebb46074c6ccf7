"""TOML file -> `Study`, or one error that lists everything wrong with it, with lines."""

from __future__ import annotations

import hashlib
import re
import tomllib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from reanalysis.errors import FormulaError, Problem, StudyError
from reanalysis.study.checks import cross_check
from reanalysis.study.datafile import resolve_data_file
from reanalysis.study.findings import Finding, explain
from reanalysis.study.formula import check_formula
from reanalysis.study.locate import KeyPath, dotted, line_of, locate_keys
from reanalysis.study.spec import Study, StudySpec

MAX_STUDY_BYTES = 1_000_000

_PLACE = re.compile(r"\s*\(at (?:line (\d+), column (\d+)|end of document)\)$")


def load_study(path: Path, *, allow_outside: bool = False) -> Study:
    """Read and validate a study file.

    Parameters
    ----------
    path : Path
        The study file (TOML, UTF-8, at most 1 MB).
    allow_outside : bool
        Whether the data file may lie outside the study file's folder.

    Returns
    -------
    Study
        Validated and frozen; its data file exists and is an ordinary local file.

    Raises
    ------
    StudyError
        With one problem for everything that is wrong, each naming file, line and key.
    """
    content = _read_bytes(path)
    text = _decode(path, content)
    raw, lines = _parse(path, text)
    spec, findings = _validate(raw)
    findings += cross_check(raw)
    findings += _formula(raw)
    data_path = _data_path(raw, path, allow_outside=allow_outside)
    if isinstance(data_path, Finding):
        findings.append(data_path)
    if findings or spec is None or not isinstance(data_path, Path):
        raise StudyError(_problems(path, findings, lines))
    return Study(
        name=path.stem,
        path=path.absolute(),
        data_path=data_path,
        sha256=hashlib.sha256(content).hexdigest(),
        spec=spec,
        places={dotted(key): _where(path, key, line) for key, line in lines.items()},
    )


def json_schema() -> dict[str, Any]:
    """JSON Schema (draft 2020-12) of the study file, for editors."""
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        **StudySpec.model_json_schema(),
        "title": "Study file",
    }


def _read_bytes(path: Path) -> bytes:
    try:
        if path.is_dir():
            raise _failure(path, "this is a folder", "a study file (TOML)", "name a study file in it")
        if not path.exists():
            raise _failure(path, "there is no such file", "a study file (TOML)", "correct the path")
        if not path.is_file():
            raise _failure(path, "this is not an ordinary file", "a study file (TOML)", "name a study file")
        with path.open("rb") as file:
            content = file.read(MAX_STUDY_BYTES + 1)
    except (OSError, ValueError) as error:
        raise _failure(
            path, f"the file cannot be read ({error})", "", "check the path and permissions"
        ) from error
    if len(content) > MAX_STUDY_BYTES:
        raise _failure(
            path,
            f"the file is larger than {MAX_STUDY_BYTES:,} bytes",
            "a study file (TOML); data go in a file of their own",
            "check that this is a study file",
        )
    return content


def _decode(path: Path, content: bytes) -> str:
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content[: error.start].count(b"\n") + 1
        raise _failure(
            path, "the text is not UTF-8", "UTF-8", "save the study file as UTF-8", line=line
        ) from error


def _parse(path: Path, text: str) -> tuple[dict[str, Any], Mapping[KeyPath, int]]:
    try:
        return tomllib.loads(text), locate_keys(text)
    except RecursionError as error:
        raise _failure(path, "lists or tables are nested too deeply", "", "flatten the file") from error
    except ValueError as error:
        # TOMLDecodeError is one of these; so is a number with thousands of digits.
        place = _PLACE.search(str(error))
        line = _syntax_line(place, text)
        reason = _PLACE.sub("", str(error))
        column = f" (column {place[2]})" if place and place[2] else ""
        raise _failure(
            path,
            f"the file is not valid TOML: {_lower_first(reason)}{column}",
            'key = "text", key = 1.5, [section] and [[repeated section]] headers',
            "correct this line; texts need quotes around them",
            line=line,
        ) from error


def _syntax_line(place: re.Match[str] | None, text: str) -> int | None:
    if place is None:
        return None
    return int(place[1]) if place[1] else text.rstrip().count("\n") + 1


def _validate(raw: dict[str, Any]) -> tuple[StudySpec | None, list[Finding]]:
    try:
        return StudySpec.model_validate(raw), []
    except ValidationError as error:
        return None, explain(error, raw)


def _formula(raw: Mapping[str, Any]) -> list[Finding]:
    model = raw.get("model")
    text = model.get("formula") if isinstance(model, dict) else None
    if not isinstance(text, str) or not text:
        return []  # reported by pydantic
    try:
        check_formula(text)
    except FormulaError as error:
        return [
            Finding(("model", "formula"), problem.found, problem.allowed, problem.advice)
            for problem in error.problems
        ]
    return []


def _data_path(raw: Mapping[str, Any], path: Path, *, allow_outside: bool) -> Path | Finding | None:
    data = raw.get("data")
    name = data.get("file") if isinstance(data, dict) else None
    if not isinstance(name, str) or not name:
        return None  # reported by pydantic
    return resolve_data_file(name, path.absolute().parent.resolve(), allow_outside=allow_outside)


def _problems(path: Path, findings: Iterable[Finding], lines: Mapping[KeyPath, int]) -> list[Problem]:
    placed = sorted(
        ((line_of(lines, finding.path), finding) for finding in findings),
        key=lambda pair: pair[0] or 0,
    )
    return [
        Problem(_where(path, finding.path, line), finding.found, finding.allowed, finding.advice)
        for line, finding in placed
    ]


def _where(path: Path, key: KeyPath, line: int | None) -> str:
    parts = [path.name, f"line {line}" if line else "", dotted(key)]
    return ", ".join(part for part in parts if part)


def _failure(path: Path, found: str, allowed: str, advice: str, *, line: int | None = None) -> StudyError:
    return StudyError(Problem(_where(path, (), line), found, allowed, advice))


def _lower_first(text: str) -> str:
    return text[:1].lower() + text[1:]
