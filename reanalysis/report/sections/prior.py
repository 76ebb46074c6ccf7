"""Section 4: does the prior matter?"""

from __future__ import annotations

from reanalysis.comparison.result import Compared
from reanalysis.report import numbers, pictures, tables
from reanalysis.report.blocks import Aside, Block, Paragraph, Section, Subheading
from reanalysis.report.context import Context
from reanalysis.sensitivity.result import POWER_SCALING_THRESHOLD, NoSweep


def prior_section(context: Context) -> Section | None:
    """Prior sets, prior to posterior, sweep and power-scaling of each question; None without questions."""
    if not context.analysis.questions:
        return None
    blocks: list[Block] = []
    for compared in context.analysis.questions:
        if len(context.analysis.questions) > 1:
            blocks.append(Subheading(compared.question.name))
        blocks += _question(context, compared)
    return Section("prior", "Does the prior matter?", tuple(blocks))


def _question(context: Context, compared: Compared) -> list[Block]:
    blocks: list[Block] = [
        tables.prior_sets(context, compared),
        pictures.prior_to_posterior(context, compared),
    ]
    if isinstance(compared.sweep, NoSweep):
        blocks.append(Paragraph(f"The prior’s width could not be varied: {compared.sweep.reason}."))
    else:
        blocks.append(pictures.width_sweep(context, compared, compared.sweep))
        blocks.append(Aside("In words for a sceptic", _sceptic(compared)))
    if compared.power_scaling is not None:
        blocks.append(Paragraph(_power_scaling(compared)))
    return blocks


def _sceptic(compared: Compared) -> str:
    if isinstance(compared.sweep, NoSweep):
        return ""
    refits = compared.sweep.refits
    how = "by re-weighting the draws"
    if refits:
        how += f", with {numbers.count(refits)} fit{'s' if refits > 1 else ''} of {'their' if refits > 1 else 'its'} own"
    return (
        f"{pictures.tipping_words(compared, compared.sweep)} Narrow means certain beforehand that hardly anything "
        f"happens: with SD w, 95{numbers.THIN}% of the prior lies within 2 w of no effect. "
        f"{numbers.count(len(compared.sweep.points))} widths were tried, {how}."
    )


def _power_scaling(compared: Compared) -> str:
    scaling = compared.power_scaling
    if scaling is None:
        return ""
    words = {
        "none": "the prior hardly moves this answer",
        "prior and data both matter": "prior and data both matter; they may pull against each other",
        "prior dominates": "the prior dominates a likelihood that says little",
    }[scaling.diagnosis]
    return (
        f"Power-scaling sensitivity (Kallioinen et al. 2024): prior {numbers.estimate(scaling.prior, 3)}, likelihood "
        f"{numbers.estimate(scaling.likelihood, 3)}. From {numbers.given(POWER_SCALING_THRESHOLD)} up a part counts as sensitive: {words}."
    )
