"""The numbered tables: each cell is a number of the analysis, in the right row and column."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from reanalysis.bayesian.result import NoPosterior
from reanalysis.report import numbers, tables
from reanalysis.report.blocks import MAX_ROWS, SpanningCell, Table, plain_text
from reanalysis.report.context import Context

STUDIES = ("sample_data/firmness", "sample_data/storage_rot", "sample_data/spots", "tests/studies/pears")


def value(cell: object) -> float:
    """The first number of a cell."""
    assert isinstance(cell, str)
    text = cell.replace(numbers.THIN, "").replace(numbers.MINUS, "-")
    return float(re.search(r"-?\d+(?:\.\d+)?", text)[0])


def close(cell: str, exact: float) -> bool:
    """Whether a cell holds a number rounded to the digits that it shows."""
    unit = 10.0 ** -len(re.split(r"\D", cell.partition(".")[2])[0])
    return abs(value(cell) - exact) <= 0.5000001 * unit


def limits(cell: str) -> tuple[str, str]:
    """Both ends of an interval's cell."""
    low, high = cell.split(" to ")
    return low, high


@pytest.mark.parametrize("study", STUDIES)
def test_side_by_side(analysed, study: str) -> None:
    """Every coefficient has its row, in the design's order, with both analyses' own numbers."""
    analysis = analysed(study)
    table = tables.side_by_side(Context(analysis))
    gaussian = analysis.prepared.design.family.name == "gaussian"

    assert len(table.rows) == len(analysis.prepared.design.columns) + gaussian
    for row, left, right in zip(
        table.rows, analysis.frequentist.coefficients, analysis.main.coefficients, strict=False
    ):
        _, _, estimate, confidence, p, median, credible, above = row
        assert close(estimate, left.estimate)
        assert all(map(close, limits(confidence), (left.low, left.high)))
        assert p == numbers.p_value(left.p)
        assert close(median, right.median)
        assert all(map(close, limits(credible), (right.low, right.high)))
        assert above == numbers.probability(right.prob_positive, right.mcse_prob_positive)


def test_rows_are_called_by_their_question(analysed) -> None:
    """A coefficient that is asked about goes by the question's name, the others by their own."""
    table = tables.side_by_side(Context(analysed("sample_data/firmness")))

    assert [(plain_text(row[0]), row[1]) for row in table.rows] == [
        ("Intercept, at zero predictors", "N"),
        ("Film against no liner", "N"),
        ("Foam against no liner", "N"),
        ("days", "N per day"),
        ("Residual standard deviation", "N"),
    ]
    assert [group.heading for group in table.groups] == ["", "Frequentist, OLS (t)", "Bayesian, weak prior"]


def test_coding_is_said_under_the_table(analysed) -> None:
    """Event, reference level and counts stand under the table that depends on them."""
    note = plain_text(tables.side_by_side(Context(analysed("tests/studies/separated"))).note)

    assert note == (
        "Models the probability that scab = yes. spray is compared with none (rows: none 20, sulphur 20)."
    )


def test_claims_are_tested_and_weighed(analysed) -> None:
    """The p-values of each claim stand left, its probabilities right."""
    analysis = analysed("sample_data/storage_rot")
    (row,) = tables.tests_and_probabilities(Context(analysis)).rows
    answer, chance = analysis.questions[0].frequentist, analysis.questions[0].main.answer

    assert row == (
        "Dipped against not dipped",
        numbers.p_value(answer.p),
        numbers.p_value(answer.p_direction),
        numbers.p_value(answer.size.p_beyond),
        numbers.p_value(answer.size.p_equivalence),
        numbers.probability(chance.direction.value, chance.direction.mcse),
        numbers.probability(chance.beyond.value, chance.beyond.mcse),
        numbers.probability(chance.negligible.value, chance.negligible.mcse),
    )


def test_claims_without_a_size(analysed) -> None:
    """Where no smallest effect was stated, the cells about size hold a dash."""
    rows = tables.tests_and_probabilities(Context(analysed("tests/studies/separated"))).rows

    assert [cell.span for cell in rows[0] if isinstance(cell, SpanningCell)] == [4]
    assert rows[1][3:5] == (numbers.NONE,) * 2
    assert rows[1][6:8] == (numbers.NONE,) * 2
    assert rows[1][1] == rows[1][2]


def test_prior_sets_of_a_question(analysed) -> None:
    """Each prior set has a row with the prior of this very effect and the answer under it."""
    analysis = analysed("sample_data/firmness")
    for compared in analysis.questions:
        table = tables.prior_sets(Context(analysis), compared)
        assert [row[0] for row in table.rows] == ["flat", "weak", "sceptical", "informed"]
        for row, reading in zip(table.rows, compared.readings, strict=True):
            median, credible, direction, beyond = row[-4:]
            assert close(median, reading.answer.median)
            assert all(map(close, limits(credible), (reading.answer.low, reading.answer.high)))
            assert direction == numbers.probability(
                reading.answer.direction.value, reading.answer.direction.mcse
            )
            assert beyond == numbers.probability(reading.answer.beyond.value, reading.answer.beyond.mcse)
    film = tables.prior_sets(Context(analysis), analysis.questions[0]).rows
    assert film[3][1] == f"normal, centre 4.5, SD 2.4{numbers.THIN}N"
    assert film[0][1] == "flat"


def test_computation_of_each_prior_set(analysed) -> None:
    """The check of every prior set is shown; one that was not run says why."""
    rows = tables.computation(Context(analysed("tests/studies/improper"))).rows
    check = analysed("tests/studies/improper").posterior("weak").check

    assert [row[0] for row in rows] == ["flat", "weak", "sceptical"]
    assert plain_text(rows[0][1].text).startswith("not run: it would be improper")
    assert rows[1][1:3] == ("sound", "0")
    assert close(rows[1][3], check.max_rhat)
    assert value(rows[1][4]) == round(check.min_ess_bulk)
    assert value(rows[1][5]) == round(check.min_ess_tail)


def test_failed_run_shows_its_diagnostics(analysed) -> None:
    """A run that failed keeps its row of diagnostics, and its posterior numbers are nowhere."""
    whole = analysed("tests/studies/pears")
    check = replace(whole.main.check, verdict="failed", max_rhat=1.42, divergences=1234, attempts=2)
    failed = NoPosterior(whole.main.prior_set, "the sampler did not converge", "tune longer", check)
    context = Context(replace(whole, posteriors=(whole.posteriors[0], failed, whole.posteriors[2])))

    row = tables.computation(context).rows[1]
    assert row[:4] == ("weak", "failed", f"1{numbers.THIN}234", "1.420")
    assert row[7] == "2"
    for cells in tables.side_by_side(context).rows:
        assert cells[-1] == SpanningCell("no posterior: the sampler did not converge", 3)


def large(analysis, times: int):
    """The same analysis with its columns many times over."""
    design = analysis.prepared.design
    return replace(
        analysis,
        prepared=replace(analysis.prepared, design=replace(design, columns=design.columns * times)),
        frequentist=replace(analysis.frequentist, coefficients=analysis.frequentist.coefficients * times),
        posteriors=tuple(replace(one, coefficients=one.coefficients * times) for one in analysis.posteriors),
        questions=(),
    )


def test_long_table_is_capped(analysed) -> None:
    """A table of more rows than a page can hold is cut, and says where all of them are."""
    table = tables.side_by_side(Context(large(analysed("tests/studies/pears"), 20)))

    assert len(table.rows) == MAX_ROWS == 60
    assert table.csv_hint == "The first 60 of 81 rows; all of them are in estimates.csv."
    assert tables.side_by_side(Context(analysed("tests/studies/pears"))).csv_hint == ""


def test_priors_in_full(analysed) -> None:
    """Every prior that is not as in the weak set has a row, alone or with its like, with unit and origin."""
    table = tables.priors_in_full(Context(analysed("sample_data/firmness")))
    cells = {row[:2]: row[2:] for row in table.rows if len(row) == 4}

    assert cells["informed", "liner[film]"][0] == f"normal, centre 4.5, SD 2.4{numbers.THIN}N"
    assert cells["flat", "sigma"][0] == "flat in the logarithm (1/x)"
    assert "sd(firmness) / sd(days)" in cells["weak", "days"][1]
    assert cells["weak", "days"][0].endswith(f"{numbers.THIN}N per day")
    assert cells["sceptical", "liner[film], liner[foam]"] != cells["weak", "liner[film]"]
    assert cells["flat", "every coefficient"] == ("flat", "no prior information")


@pytest.mark.parametrize("study", STUDIES)
def test_numbers_run_on(analysed, study: str) -> None:
    """Tables of one report take the next number each."""
    context = Context(analysed(study))
    made: list[Table] = [
        tables.side_by_side(context),
        tables.computation(context),
        tables.priors_in_full(context),
    ]

    assert [table.number for table in made] == [1, 2, 3]
    assert all(plain_text(table.caption).endswith(".") for table in made)
