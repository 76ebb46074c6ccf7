"""The machine-readable files: JSON in full precision, CSV that a spreadsheet cannot run."""

from __future__ import annotations

import csv
import io
import json
import math

import pytest

from reanalysis.report import schema
from reanalysis.report.export import CSV_COLUMNS, estimates_csv, provenance_json, results_json, results_schema
from reanalysis.report.results import build_results

STUDIES = ("sample_data/firmness", "tests/studies/separated", "tests/studies/improper")


@pytest.fixture(params=STUDIES)
def results(request, analysed):
    """The results of a sound study, of one without an estimate, of one without a main posterior."""
    return build_results(analysed(request.param))


def rows_of(results: schema.Results) -> list[dict[str, str]]:
    """The CSV as a spreadsheet reads it."""
    return list(csv.DictReader(io.StringIO(estimates_csv(results))))


def test_json_comes_back_equal(results) -> None:
    """Reading the JSON gives the same numbers to the last bit, and writing them again the same bytes."""
    text = results_json(results)
    again = schema.Results.model_validate_json(text)

    assert again == results
    assert results_json(again) == text
    assert text.endswith("}\n")


def test_json_holds_only_finite_numbers(results) -> None:
    """No NaN and no infinity, which JSON does not have."""

    def refuse(word: str) -> None:
        raise AssertionError(word)

    json.loads(results_json(results), parse_constant=refuse)


def conforms(value: object, rule: dict, definitions: dict, where: str = "$") -> list[str]:
    """Check a value against the parts of JSON Schema that pydantic writes; return what is wrong."""
    if "$ref" in rule:
        return conforms(value, definitions[rule["$ref"].rsplit("/", 1)[1]], definitions, where)
    if "anyOf" in rule:
        faults = [conforms(value, one, definitions, where) for one in rule["anyOf"]]
        return [] if [] in faults else min(faults, key=len)
    if "const" in rule and value != rule["const"]:
        return [f"{where} is {value!r}, not {rule['const']!r}"]
    kinds = {"object": dict, "array": list, "string": str, "integer": int, "number": (int, float)}
    kinds |= {"null": type(None), "boolean": bool}
    if not isinstance(value, kinds[rule["type"]]) or (isinstance(value, bool) != (rule["type"] == "boolean")):
        return [f"{where} is {value!r}, not {rule['type']}"]
    if isinstance(value, list):
        return [
            f
            for k, one in enumerate(value)
            for f in conforms(one, rule["items"], definitions, f"{where}[{k}]")
        ]
    if not isinstance(value, dict):
        return []
    known, others = rule.get("properties", {}), rule.get("additionalProperties", True)
    faults = [f"{where} lacks {key}" for key in rule.get("required", []) if key not in value]
    for key, one in value.items():
        if key in known:
            faults += conforms(one, known[key], definitions, f"{where}.{key}")
        elif others is False:
            faults.append(f"{where} has no {key}")
        elif isinstance(others, dict):
            faults += conforms(one, others, definitions, f"{where}.{key}")
    return faults


def test_json_conforms_to_the_published_schema(results) -> None:
    """The schema that users get allows what is written."""
    rule = results_schema()

    assert conforms(json.loads(results_json(results)), rule, rule["$defs"]) == []


def test_schema_refuses_what_is_not_written(results) -> None:
    """A missing part, a foreign one, a text in a number's place each break the schema."""
    rule = results_schema()
    whole = json.loads(results_json(results))
    spoilt = [
        {key: value for key, value in whole.items() if key != "fit"},
        whole | {"weather": "fine"},
        whole | {"data": whole["data"] | {"rows_used": "92"}},
    ]

    assert [len(conforms(one, rule, rule["$defs"])) for one in spoilt] == [1, 1, 1]


def test_csv_has_a_row_for_everything(results) -> None:
    """One row for each coefficient and question, each analysis and each prior set, in order."""
    sets = [prior_set.name for prior_set in results.prior_sets]
    things = [("coefficient", one.term) for one in results.coefficients]
    things += [("question", one.name) for one in results.questions]
    expected = [
        (*thing, *pair)
        for thing in things
        for pair in [("frequentist", ""), *(("bayesian", s) for s in sets)]
    ]

    found = [(row["kind"], row["name"], row["analysis"], row["prior_set"]) for row in rows_of(results)]

    assert found == expected


def same(text: str, value: float | None) -> bool:
    """Whether a cell holds exactly a number, or is empty for none."""
    return text == "" if value is None else math.isclose(float(text), value, rel_tol=0.0, abs_tol=0.0)


def test_csv_numbers_equal_those_of_the_json(results) -> None:
    """Every number of the CSV is the JSON's, to the last bit; where there is none, the reason stands."""
    parts = [part for one in (*results.coefficients, *results.questions)
             for part in (one.frequentist, *one.posterior.values())]  # fmt: skip
    for row, part in zip(rows_of(results), parts, strict=True):
        if isinstance(part, schema.AbsentPart):
            assert row["note"] == part.reason
            assert row["estimate"] == row["low"] == row["high"] == row["p"] == ""
            continue
        assert same(row["estimate"], getattr(part, "estimate", None) or getattr(part, "median", None))
        assert same(row["low"], part.low)
        assert same(row["high"], part.high)
        assert float(row["level"]) == results.study.level
        for column in ("p", "prob_positive", "prob_direction", "prob_beyond"):
            assert same(row[column], getattr(part, column, None)), column
        assert same(row["se_or_sd"], getattr(part, "se", None) or getattr(part, "sd", None))


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r"])
def test_csv_runs_nothing(analysed, start: str) -> None:
    """A label that a spreadsheet would take for a formula gets an apostrophe; numbers get none."""
    results = build_results(analysed("tests/studies/pears"))
    wicked = f"{start}HYPERLINK(1),2\nx"
    question = results.questions[0].model_copy(update={"name": wicked})

    rows = rows_of(results.model_copy(update={"questions": (question,)}))

    assert {row["name"] for row in rows if row["kind"] == "question"} == {f"'{wicked}"}
    slopes = [row for row in rows if row["name"] == "weeks"]
    assert float(slopes[0]["estimate"]) < 0.0


def test_csv_head() -> None:
    """The columns are those that the documentation promises."""
    assert CSV_COLUMNS[:5] == ("kind", "name", "unit", "analysis", "prior_set")
    assert len(set(CSV_COLUMNS)) == len(CSV_COLUMNS) == 15


def test_provenance_holds_the_machine(analysed) -> None:
    """What depends on machine and clock stands here: absolute paths, versions, times."""
    analysis = analysed("tests/studies/pears")
    record = json.loads(provenance_json(analysis, {"sampling": 1.23456}))

    assert record["study_file"] == str(analysis.prepared.study.path)
    assert record["data_file"].endswith("pears.csv")
    assert record["data_sha256"] == build_results(analysis).data.sha256
    assert record["seconds"] == {"sampling": 1.235}
    assert set(record["versions"]) >= {"reanalysis", "statsmodels", "bambi", "nutpie", "numpy"}
