"""`reanalysis check`: the model in words, and what can be seen coming, before anything is fitted."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

ROOT = Path(__file__).resolve().parents[2]

HEAVY = {
    *("arviz", "arviz_stats", "bambi", "matplotlib", "numba", "nutpie", "pymc", "pytensor", "statsmodels"),
    "weasyprint",
}


def words(text: str) -> list[str]:
    """Lines with single spaces, as the width of a column is no promise."""
    return [" ".join(line.split()) for line in text.splitlines()]


def test_check_describes_the_study(desk: Any) -> None:
    """Rows, reference levels, columns, priors, the question: each stands in a line of its own."""
    ran = desk.run("check", desk.study)

    assert (ran.code, ran.stderr) == (0, "")
    lines = words(ran.stdout)
    expected = [
        "pears: Do bags make heavier pears?",
        "rows 28 used of 30 in pears.csv",
        "1 without grams",
        "2 without weeks",
        "model grams ~ bag + weeks",
        "gaussian with identity link",
        "bag: reference none; rows: none 10, paper 9, net 9",
        "priors weak (main): built in: scaled to the spread of the data",
        (
            "bag[paper] normal, centre 0, SD 2.43 g "
            "[5 % prior probability beyond the smallest effect that matters]"
        ),
        "sigma flat in the logarithm (1/x) [reference prior, proportional to 1/sigma]",
        "the intercept's prior is about the outcome at the centre of the data",
        (
            "question Paper against no bag: is bag[paper] above zero? matters beyond 4 g; "
            "probability needed to act 0.95"
        ),
        "ahead nothing that should trouble the fits",
    ]
    assert [line for line in expected if line not in lines] == []


def test_priors_are_numbers(desk: Any) -> None:
    """The weak prior of a slope is 2.5 sd(y) / sd(x) over the rows used, to three digits."""
    used = np.genfromtxt(desk.data, delimiter=",", skip_header=1, usecols=(0, 2))
    used = used[~np.isnan(used).any(axis=1)]
    slope = 2.5 * used[:, 0].std() / used[:, 1].std()

    lines = words(desk.run("check", desk.study).stdout)

    at = next(k for k, line in enumerate(lines) if line.startswith("priors weak"))
    assert (
        f"weeks normal, centre 0, SD {slope:.3g} g per week [scaled to the data: 2.5 sd(grams) / sd(weeks)]"
        in lines[at : at + 6]
    )
    assert len(used) == 28


def test_check_names_the_event(desk: Any) -> None:
    """A two-level outcome is said to model the event, not its opposite."""
    study = desk.folder / "separated.toml"
    assert "models the probability that scab = yes (not no)" in desk.run("check", study).stdout

    desk.edit('event   = "yes"', 'event = "no"', file="separated.toml")
    assert "models the probability that scab = no (not yes)" in desk.run("check", study).stdout


@pytest.mark.parametrize(
    ("direction", "line"),
    [
        ('direction = "less"', "is bag[paper] below zero?"),
        ('direction = "either"', "is bag[paper] other than zero?"),
        ("", "is bag[paper] other than zero?"),
    ],
)
def test_check_says_what_is_asked(desk: Any, direction: str, line: str) -> None:
    """Each direction is said in words, and a question without a size or with a bar of its own too."""
    desk.edit('direction      = "greater"', direction)
    desk.edit("matters_beyond = 4.0", "act_when = 0.9")

    out = desk.run("check", desk.study).stdout

    assert f"{line} no smallest effect that matters; probability needed to act 0.9\n" in out


def rewrite(desk: Any, header: str, rows: list[list[object]], formula: str, effect: str) -> None:
    """Give the study other data and another formula."""
    lines = [header, *(",".join(map(str, row)) for row in rows)]
    desk.data.write_text("\n".join(lines) + "\n")
    desk.edit('units  = { grams = "g", weeks = "week" }', "")
    desk.edit('levels = { bag = ["none", "paper", "net"] }', "")
    desk.edit("grams ~ bag + weeks", formula)
    desk.edit('"bag[paper]"', f'"{effect}"')


def noise(seed: int, count: int) -> list[float]:
    """Numbers that depend on nothing."""
    return [round(float(value), 4) for value in np.random.default_rng(seed).normal(size=count)]


def dependent(desk: Any) -> None:
    """One column is twice the other."""
    rows = [[180 + y, x, 2 * x] for y, x in zip(noise(1, 30), noise(2, 30), strict=True)]
    rewrite(desk, "grams,rain,wet", rows, "grams ~ rain + wet", "rain")


def overlapping(desk: Any) -> None:
    """One column is nearly the other."""
    rows = [
        [180 + y, x, x + 0.01 * z] for y, x, z in zip(noise(1, 30), noise(2, 30), noise(3, 30), strict=True)
    ]
    rewrite(desk, "grams,rain,wet", rows, "grams ~ rain + wet", "rain")


def far_from_zero(desk: Any) -> None:
    """A date in years and its square, over three years."""
    dates = [1990 + k / 10 for k in range(30)]
    rows = [[180 + y, date, date**2] for y, date in zip(noise(1, 30), dates, strict=True)]
    rewrite(desk, "grams,date,square", rows, "grams ~ date + square", "date")


def empty_cell(desk: Any) -> None:
    """No pear in the open was bare."""
    cells = [("net", "bare"), ("open", "bag"), ("net", "bag")]
    rows = [[180 + y, *cells[k % 3]] for k, y in enumerate(noise(1, 30))]
    rewrite(desk, "grams,net,bag", rows, "grams ~ net * bag", "net[open]")


def seen_once(desk: Any) -> None:
    """One level has a single row."""
    rows = [[180 + y, "silk" if k == 4 else "ab"[k % 2]] for k, y in enumerate(noise(1, 30))]
    rewrite(desk, "grams,bag", rows, "grams ~ bag", "bag[b]")


def many_levels(desk: Any) -> None:
    """A hundred levels, three rows each."""
    rows = [[180 + y, f"tree{k % 100}"] for k, y in enumerate(noise(1, 300))]
    rewrite(desk, "grams,tree", rows, "grams ~ tree", "tree[tree1]")


AHEAD = {
    dependent: ("stop: These columns cannot be told apart", ["rain", "wet"]),
    overlapping: ("note: These predictors overlap: the variance of", ["rain", "leaving one of them out"]),
    far_from_zero: ("warning: The condition number is", ["Centre or rescale"]),
    empty_cell: ("warning: No row has this combination", ["open", "bare", "Merge levels"]),
    seen_once: ("note: Only one row has bag = silk.", ["Merge rare levels"]),
    many_levels: ("note: tree has 100 levels.", ["an identifier read as labels"]),
}


@pytest.mark.parametrize("spoil", AHEAD, ids=lambda spoil: spoil.__name__)
def test_check_sees_trouble_coming(desk: Any, spoil: Any) -> None:
    """What will trouble a fit is named with its severity and with advice; the input as such is valid."""
    start, fragments = AHEAD[spoil]
    spoil(desk)

    ran = desk.run("check", desk.study)

    assert (ran.code, ran.stderr) == (0, "")
    found = [line for line in words(ran.stdout) if line.startswith(f"ahead {start}")]
    assert len(found) == 1, ran.stdout
    assert all(fragment in found[0] for fragment in fragments), found


def test_check_sees_separation(desk: Any) -> None:
    """Separated data are recognised without a fit: which rows, and where the estimate runs to."""
    out = desk.run("check", desk.folder / "separated.toml").stdout

    assert (
        "ahead     warning: No finite maximum-likelihood estimate exists (it runs to minus infinity)" in out
    )
    assert "all 20 rows with spray[sulphur] have scab = no" in out


def test_check_goes_through_all_studies(desk: Any) -> None:
    """A bad study does not hide the ones after it, and the exit code remembers it."""
    desk.edit("spray + rain", "spray + sun", file="separated.toml")

    ran = desk.run("check", desk.folder / "separated.toml", desk.study)

    assert ran.code == 2
    assert ran.stderr.startswith("separated.toml: 1 problem\n")
    assert ran.stdout.startswith("pears: Do bags make heavier pears?\n")


def test_check_loads_no_engine() -> None:
    """Neither sampler nor statsmodels nor anything that draws is loaded, so that a check is quick.

    The terminal of this test lacks characters that the report uses: they are replaced, and nothing breaks.
    """
    code = (
        "import json, sys\nfrom reanalysis.cli import main\n"
        f"code = main(['check', {str(ROOT / 'sample_data' / 'firmness.toml')!r}])\n"
        "print(json.dumps([code, sorted({name.split('.')[0] for name in sys.modules})]))"
    )
    done = subprocess.run(  # noqa: S603
        [sys.executable, "-c", code],
        capture_output=True,
        encoding="latin-1",
        env=os.environ | {"PYTHONIOENCODING": "latin-1"},
        check=False,
    )

    assert done.returncode == 0, done.stderr
    exit_code, loaded = json.loads(done.stdout.splitlines()[-1])
    assert exit_code == 0
    assert done.stderr == ""
    assert "matters beyond 2?N;" in done.stdout
    assert "pandas" in loaded
    assert set(loaded) & HEAVY == set()
