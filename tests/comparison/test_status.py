"""What stands between the reader and the results."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from reanalysis.bayesian.result import ComputationCheck, Draws, NoPosterior, PosteriorFit, PriorSet
from reanalysis.comparison.result import Caveat, Status
from reanalysis.comparison.status import judge
from reanalysis.design.outlook import Finding
from reanalysis.frequentist.fit import fit_frequentist
from reanalysis.frequentist.result import NotEstimable

CHECK = ComputationCheck("sound", 0, 8000, 1.0, 4000.0, 4000.0, 1.0, 1, ())


def prior_set(name: str) -> PriorSet:
    """A prior set of which only the name counts."""
    return PriorSet(name, "", "centre", (), ())


def fit(name: str, verdict: str = "sound", *findings: str) -> PosteriorFit:
    """A posterior of which only name and check count."""
    check = replace(CHECK, verdict=verdict, findings=findings)
    nothing = Draws(np.empty((1, 1, 0)), np.empty((1, 1, 0)))
    return PosteriorFit(prior_set(name), 0.95, nothing, (), None, (), check)


def missing(name: str, reason: str = "it would be improper") -> NoPosterior:
    """A prior set without a posterior."""
    return NoPosterior(prior_set(name), reason, "", None)


@pytest.fixture(scope="module")
def ols(design_of: Any, table_of: Any) -> Any:
    """A frequentist fit without fault."""
    return fit_frequentist(design_of(table_of("dobson_plant_weight"), "weight ~ group"), level=0.95, seed=0)


def test_nothing_to_say_is_sound(ols: Any) -> None:
    """Sound fits, and findings that are notes or warnings, leave the status sound."""
    notes = [Finding("few outcomes", "y", "Few events.", "Add.", s) for s in ("note", "warning")]

    assert judge(ols, [fit("flat"), fit("weak")], "weak", notes) == Status("sound", ())


def test_a_failed_main_prior_set_fails_the_report(ols: Any) -> None:
    """No posterior under the main prior set fails, under another one it is a doubt."""
    failed = judge(ols, [fit("flat"), missing("weak")], "weak", ())
    doubtful = judge(ols, [missing("flat"), fit("weak")], "weak", ())

    assert (failed.verdict, doubtful.verdict) == ("failed", "doubtful")
    assert (
        failed.caveats[0].message == "There is no posterior under the weak prior set: it would be improper."
    )
    assert doubtful.caveats == (
        Caveat("doubtful", "There is no posterior under the flat prior set: it would be improper."),
    )


def test_failures_come_first(ols: Any) -> None:
    """A failure goes before the doubts, each with its own sentence."""
    sets = [fit("flat", "doubtful", "divergent transitions", "R-hat"), missing("weak", "no start")]

    status = judge(ols, sets, "weak", ())

    assert [caveat.severity for caveat in status.caveats] == ["failed", "doubtful"]
    assert status.caveats[1].message == (
        "The computation under the flat prior set is doubtful (divergent transitions; R-hat)."
    )
    assert status.verdict == "failed"


def test_a_shared_reason_is_said_once(ols: Any) -> None:
    """Prior sets without a posterior for one reason share a sentence; the main one makes it fail."""
    status = judge(ols, [missing("flat"), missing("weak"), missing("own")], "weak", ())

    assert status.caveats == (
        Caveat(
            "failed", "There is no posterior under the flat, weak and own prior sets: it would be improper."
        ),
    )


def test_a_missing_estimate_is_a_doubt(ols: Any) -> None:
    """Coefficients without an estimate are named with the reason."""
    gone = NotEstimable("group[trt]", "separated: all of one kind", "")

    status = judge(replace(ols, coefficients=(ols.coefficients[0], gone)), [fit("weak")], "weak", ())

    assert status == Status(
        "doubtful",
        (
            Caveat(
                "doubtful",
                "No maximum-likelihood estimate exists for group[trt]: separated: all of one kind.",
            ),
        ),
    )


def test_a_fit_that_did_not_converge_fails(ols: Any) -> None:
    """A frequentist fit without convergence has no numbers to rely on."""
    status = judge(replace(ols, converged=False), [fit("weak")], "weak", ())

    assert status == Status("failed", (Caveat("failed", "The frequentist fit did not converge."),))


def test_a_question_that_no_data_can_answer_is_a_doubt(ols: Any) -> None:
    """Findings that stop are repeated, once each."""
    stop = Finding("dependent columns", "a", "a and b are the same.", "Drop one.", "stop")

    assert judge(ols, [fit("weak")], "weak", [stop, stop]) == Status(
        "doubtful", (Caveat("doubtful", "a and b are the same."),)
    )
