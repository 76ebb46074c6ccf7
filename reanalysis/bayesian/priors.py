"""From the study's prior blocks to numbers: every prior of every parameter, resolved and explained.

The built-in sets are

``flat``
    constant for every coefficient; for a residual standard deviation the
    reference prior p(sigma) proportional to 1/sigma, under which a Gaussian
    model's posterior is the frequentist t distribution (Jeffreys 1961;
    Zellner 1971);
``weak``
    the scaling rule that bambi publishes for its defaults, computed here from
    the design, column by column;
``sceptical``
    as ``weak``, but each questioned effect gets a normal prior centred at no
    effect with 5 % prior probability beyond the smallest effect that matters
    (Spiegelhalter, Freedman and Parmar 1994).
"""

from __future__ import annotations

import difflib
from collections.abc import Mapping

import numpy as np
from scipy import special

from reanalysis.bayesian.result import ParameterPrior, PriorSet
from reanalysis.design.model import Column, Design
from reanalysis.errors import DesignError, Problem
from reanalysis.study.distributions import Flat, HalfStudentT, LogFlat, Normal
from reanalysis.study.locate import dotted
from reanalysis.study.spec import PriorSpec, QuestionSpec, StudySpec

SCEPTICAL_TAIL = 0.05
"""Prior probability that the sceptic gives to an effect beyond what matters."""

SCEPTICAL_FALLBACK = 0.25
"""Without a smallest effect that matters: the prior SD of the change in the outcome per SD of the
column, in SDs of the outcome."""


def resolve_prior_sets(spec: StudySpec, design: Design) -> tuple[PriorSet, ...]:
    """Resolve all prior sets of a study.

    Parameters
    ----------
    spec : StudySpec
    design : Design

    Returns
    -------
    tuple of PriorSet
        ``flat``, ``weak``, ``sceptical``, then the author's in the order of the study file.

    Raises
    ------
    DesignError
        When a prior is given for something that is not a coefficient, a term or an auxiliary parameter.
    """
    problems = [
        problem for number, prior in enumerate(spec.prior) for problem in _unknown_keys(number, prior, design)
    ]
    if problems:
        raise DesignError(problems)
    weak = weak_priors(design)
    return (
        flat_priors(design),
        weak,
        sceptical_priors(design, weak, spec.question),
        *(author_priors(prior, design, weak) for prior in spec.prior),
    )


def flat_priors(design: Design) -> PriorSet:
    """The prior set that adds nothing to the likelihood."""
    return PriorSet(
        name="flat",
        source="built in: no prior information",
        intercept_at="centre",
        coefficients=tuple(
            ParameterPrior(column.name, Flat(), "no prior information") for column in design.columns
        ),
        auxiliary=tuple(
            ParameterPrior(name, LogFlat(), "reference prior, proportional to 1/sigma")
            for name in _auxiliary_names(design)
        ),
    )


def weak_priors(design: Design) -> PriorSet:
    """The weak prior set: bambi's published scaling rule, column by column.

    Slopes are normal around zero with SD 2.5 sd(y) / sd(x) (outcomes that are not measured in a
    unit: sd(y) = 1); logit and probit models have SD 1 / sd(x), or 1 for a factor's column. The
    intercept at the centre is normal around mean(y) with variance (2.5 sd(y))^2 plus the slopes'
    prior variance times the squared column means; logit and probit: SD 1.5. A residual standard
    deviation has a half Student t with 4 degrees of freedom and scale sd(y). Standard deviations
    have n in the denominator.
    """
    slopes = {
        column.name: _weak_slope(column, design) for column in design.columns if column.kind != "intercept"
    }
    coefficients = tuple(
        _weak_intercept(column, design, slopes) if column.kind == "intercept" else slopes[column.name]
        for column in design.columns
    )
    spread = _response_sd(design)
    auxiliary = tuple(
        ParameterPrior(
            name, HalfStudentT(df=4.0, scale=spread), f"scaled to the data: sd({_outcome(design)})"
        )
        for name in _auxiliary_names(design)
    )
    return PriorSet("weak", "built in: scaled to the spread of the data", "centre", coefficients, auxiliary)


def sceptical_priors(design: Design, weak: PriorSet, questions: tuple[QuestionSpec, ...]) -> PriorSet:
    """The sceptical prior set: doubts about each questioned effect, weak priors elsewhere.

    Parameters
    ----------
    design : Design
    weak : PriorSet
        Priors of everything that no question is about.
    questions : tuple of QuestionSpec
        Where two questions are about one effect, the smaller of their limits rules.

    Notes
    -----
    The SD is delta / z, where delta is the smallest effect that matters and z the normal quantile
    that leaves 5 % beyond delta: in the asked direction, or on both sides together for ``either``
    (Spiegelhalter, Freedman and Parmar 1994).
    """
    doubts: dict[str, ParameterPrior] = {}
    for question in questions:
        column = _column(design, question.effect)
        if column is None:
            continue
        doubt = _doubt(column, design, question)
        known = doubts.get(column.name)
        if known is None or _sd(doubt) < _sd(known):
            doubts[column.name] = doubt
    return PriorSet(
        name="sceptical",
        source="built in: centred at no effect, 5 % beyond the smallest effect that matters",
        intercept_at=weak.intercept_at,
        coefficients=tuple(doubts.get(prior.name, prior) for prior in weak.coefficients),
        auxiliary=weak.auxiliary,
    )


def author_priors(prior: PriorSpec, design: Design, weak: PriorSet) -> PriorSet:
    """A prior set of the author's: the stated priors, weak ones for whatever is not stated.

    The weak prior of an intercept is about the centre of the data: an intercept that is not stated
    stays there, wherever the author wants intercepts to be.
    """
    stated: dict[str, ParameterPrior] = {}
    for column in design.columns:
        key = column.name if column.name in prior.terms else column.term
        if key in prior.terms:
            stated[column.name] = ParameterPrior(column.name, prior.terms[key], f"stated: {prior.source}")
    auxiliary = tuple(
        ParameterPrior(known.name, prior.auxiliary[known.name], f"stated: {prior.source}")
        if known.name in prior.auxiliary
        else known
        for known in weak.auxiliary
    )
    return PriorSet(
        name=prior.name,
        source=prior.source,
        intercept_at=prior.intercept_at if weak.coefficients[0].name in stated else weak.intercept_at,
        coefficients=tuple(stated.get(known.name, known) for known in weak.coefficients),
        auxiliary=auxiliary,
    )


def _weak_slope(column: Column, design: Design) -> ParameterPrior:
    family = design.family
    if family.link in ("logit", "probit"):
        if column.kind == "categorical":
            return ParameterPrior(column.name, Normal(sd=1.0), "SD 1 for a factor's column")
        return ParameterPrior(
            column.name, Normal(sd=1.0 / _spread(column)), f"scaled to the data: 1 / sd({column.name})"
        )
    outcome = f"2.5 sd({_outcome(design)})" if family.latent_sd is None else "2.5"
    return ParameterPrior(
        column.name,
        Normal(sd=2.5 * _response_sd(design) / _spread(column)),
        f"scaled to the data: {outcome} / sd({column.name})",
    )


def _weak_intercept(column: Column, design: Design, slopes: Mapping[str, ParameterPrior]) -> ParameterPrior:
    if design.family.link in ("logit", "probit"):
        return ParameterPrior(column.name, Normal(sd=1.5), "SD 1.5 at the centre of the data")
    own = 2.5 * _response_sd(design)
    others = sum((_sd(slopes[c.name]) * c.mean) ** 2 for c in design.columns if c.kind != "intercept")
    centre = float(np.mean(design.response.values)) if design.family.latent_sd is None else 0.0
    return ParameterPrior(
        column.name,
        Normal(mean=centre, sd=float(np.sqrt(own**2 + others))),
        "scaled to the data, at the centre of the data",
    )


def _doubt(column: Column, design: Design, question: QuestionSpec) -> ParameterPrior:
    if question.matters_beyond is None:
        latent = design.family.latent_sd
        spread = _response_sd(design) if latent is None else latent
        outcome = f"sd({_outcome(design)})" if latent is None else "the outcome's SD on the model's scale"
        per_sd = "" if column.kind == "intercept" else f" / sd({column.name})"
        return ParameterPrior(
            column.name,
            Normal(sd=SCEPTICAL_FALLBACK * spread / _spread(column)),
            f"no smallest effect that matters was stated; used instead: "
            f"{SCEPTICAL_FALLBACK} {outcome}{per_sd}",
        )
    tail = SCEPTICAL_TAIL / 2.0 if question.direction == "either" else SCEPTICAL_TAIL
    sides = " either way" if question.direction == "either" else ""
    return ParameterPrior(
        column.name,
        Normal(sd=-question.matters_beyond / float(special.ndtri(tail))),
        f"5 % prior probability beyond the smallest effect that matters{sides}",
    )


def _sd(prior: ParameterPrior) -> float:
    return prior.distribution.sd if isinstance(prior.distribution, Normal) else float("inf")


def _spread(column: Column) -> float:
    # A combination of levels that no row has gives a column of zeros; it counts as one of unit spread.
    return column.sd if column.sd > 0.0 else 1.0


def _response_sd(design: Design) -> float:
    return float(np.std(design.response.values)) if design.family.latent_sd is None else 1.0


def _outcome(design: Design) -> str:
    return design.response.name


def _auxiliary_names(design: Design) -> tuple[str, ...]:
    return () if design.family.auxiliary is None else (design.family.auxiliary,)


def _column(design: Design, name: str) -> Column | None:
    return next((column for column in design.columns if column.name == name), None)


def _unknown_keys(number: int, prior: PriorSpec, design: Design) -> list[Problem]:
    names = {column.name for column in design.columns} | {column.term for column in design.columns}
    auxiliary = _auxiliary_names(design)
    problems = []
    for section, keys, allowed in (("terms", prior.terms, names), ("auxiliary", prior.auxiliary, auxiliary)):
        for key in sorted(set(keys) - set(allowed)):
            close = difflib.get_close_matches(key, sorted(allowed), n=1)
            problems.append(
                Problem(
                    where=dotted(("prior", number, section, key)),
                    found=f'the model has nothing called "{key}"',
                    allowed=", ".join(sorted(allowed)) or "none for this family",
                    advice=f'write "{close[0]}"' if close else "use one of these names, or remove the prior",
                )
            )
    return problems
