"""Section 2: every coefficient, both ways."""

from __future__ import annotations

from reanalysis.comparison.result import Compared
from reanalysis.report import numbers, pictures, tables
from reanalysis.report.blocks import Block, Emphasis, Lead, Section, Text
from reanalysis.report.context import Context

_LIKELIHOODS = {
    ("gaussian", "identity"): "normal errors",
    ("bernoulli", "logit"): "a yes-or-no outcome with logit link",
    ("bernoulli", "probit"): "a yes-or-no outcome with probit link",
    ("bernoulli", "cloglog"): "a yes-or-no outcome with complementary log-log link",
    ("poisson", "log"): "Poisson counts with log link",
}


def likelihood_words(context: Context) -> str:
    """Name the likelihood that both analyses use."""
    design = context.analysis.prepared.design
    words = _LIKELIHOODS[(design.family.name, design.family.link)]
    return f"{words} and exposure {design.exposure}" if design.exposure else words


def side_by_side_section(context: Context) -> Section:
    """The table of both analyses, then the questions on one axis for each unit."""
    design, fit = context.analysis.prepared.design, context.analysis.frequentist
    method = "ordinary least squares" if fit.method == "OLS" else "maximum likelihood"
    rows, columns = numbers.count(design.rows.used), numbers.count(len(design.columns))
    lead = Lead(
        (
            Text(f"One model, fitted twice to the same {rows} rows and the same {columns} columns: "),
            Emphasis(design.formula),
            Text(
                f", {likelihood_words(context)}. Left, {method}; right, the same likelihood with "
                f"{context.main_prior} priors."
            ),
        )
    )
    blocks: list[Block] = [lead, tables.side_by_side(context)]
    questions = context.analysis.questions
    blocks += [pictures.side_by_side(context, group) for group in _by_unit(questions)]
    if not questions:
        blocks += pictures.all_coefficients(context)
    return Section("side-by-side", "Side by side", tuple(blocks))


def _by_unit(questions: tuple[Compared, ...]) -> list[list[Compared]]:
    groups: dict[str, list[Compared]] = {}
    for compared in questions:
        groups.setdefault(compared.question.unit, []).append(compared)
    return list(groups.values())
