"""Whether anything should stop the reader from relying on the results, said before anything else."""

from __future__ import annotations

from collections.abc import Sequence

from reanalysis.bayesian.result import NoPosterior, PosteriorResult
from reanalysis.comparison.result import Caveat, Status
from reanalysis.design.outlook import Finding
from reanalysis.frequentist.result import FrequentistFit, NotEstimable


def judge(
    frequentist: FrequentistFit,
    posteriors: Sequence[PosteriorResult],
    main_prior: str,
    findings: Sequence[Finding],
) -> Status:
    """Collect what the reader must know before relying on the numbers.

    Parameters
    ----------
    frequentist : FrequentistFit
    posteriors : sequence of PosteriorFit or NoPosterior
        One for each prior set.
    main_prior : str
        A failure under the main prior set fails the report; under another one it is a doubt.
    findings : sequence of Finding
        What could be seen in the design; those that stop are repeated here.
    """
    caveats = [
        *_of_posteriors(posteriors, main_prior),
        *_of_frequentist(frequentist),
        *(Caveat("doubtful", finding.message) for finding in findings if finding.severity == "stop"),
    ]
    caveats.sort(key=lambda caveat: caveat.severity != "failed")
    if not caveats:
        return Status("sound", ())
    return Status(caveats[0].severity, tuple(dict.fromkeys(caveats)))


def _of_posteriors(posteriors: Sequence[PosteriorResult], main_prior: str) -> list[Caveat]:
    missing: dict[str, list[str]] = {}
    doubtful: dict[str, list[str]] = {}
    for posterior in posteriors:
        name = posterior.prior_set.name
        if isinstance(posterior, NoPosterior):
            missing.setdefault(posterior.reason, []).append(name)
        elif posterior.check.verdict == "doubtful":
            doubtful.setdefault("; ".join(posterior.check.findings), []).append(name)
    caveats = [
        Caveat(
            "failed" if main_prior in names else "doubtful",
            f"There is no posterior under the {_sets(names)}: {reason}.",
        )
        for reason, names in missing.items()
    ]
    caveats += [
        Caveat("doubtful", f"The computation under the {_sets(names)} is doubtful ({found}).")
        for found, names in doubtful.items()
    ]
    return caveats


def _sets(names: Sequence[str]) -> str:
    if len(names) == 1:
        return f"{names[0]} prior set"
    return f"{', '.join(names[:-1])} and {names[-1]} prior sets"


def _of_frequentist(frequentist: FrequentistFit) -> list[Caveat]:
    caveats = []
    missing = [result for result in frequentist.coefficients if isinstance(result, NotEstimable)]
    if missing:
        names = ", ".join(result.name for result in missing)
        caveats.append(
            Caveat("doubtful", f"No maximum-likelihood estimate exists for {names}: {missing[0].reason}.")
        )
    elif not frequentist.converged:
        caveats.append(Caveat("failed", "The frequentist fit did not converge."))
    return caveats
