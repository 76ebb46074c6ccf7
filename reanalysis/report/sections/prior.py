"""Section 4: whether the prior matters."""

from __future__ import annotations

from reanalysis.comparison.result import Compared
from reanalysis.effects.result import PosteriorAnswer
from reanalysis.report import numbers, pictures, tables
from reanalysis.report.blocks import Aside, Block, Paragraph, Section, Subheading
from reanalysis.report.context import Context
from reanalysis.report.sentences import exceeds_words, sign_words
from reanalysis.sensitivity.result import (
    POWER_SCALING_THRESHOLD,
    NoSweep,
    NoTipping,
    PowerScaling,
    Sweep,
    TippingPrior,
    TippingResult,
)

CENTRAL = 1.96
"""Standard deviations either side of the centre that hold 95 % of a normal prior."""


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
    sweep = compared.sweep
    if isinstance(sweep, NoSweep):
        blocks.append(Paragraph(f"The prior’s width could not be varied: {sweep.reason}."))
    else:
        blocks.append(pictures.width_sweep(context, compared, sweep))
        blocks.append(Aside("In words for a sceptic", sceptic_words(compared, sweep)))
        blocks.append(Paragraph(_how_it_was_done(sweep, compared.power_scaling)))
    return blocks


def sceptic_words(compared: Compared, sweep: Sweep) -> str:
    """Say how sure of nothing somebody must have been beforehand to stay unconvinced."""
    results = (sweep.direction_tipping, sweep.beyond_tipping)
    return " ".join(_for_a_sceptic(compared, sweep, result) for result in results if result is not None)


def _for_a_sceptic(compared: Compared, sweep: Sweep, tipping: TippingResult) -> str:
    claim, needed = _claim(compared, tipping), numbers.given(compared.question.act_when)
    if isinstance(tipping, NoTipping):
        narrowest, widest = (_within(compared, sweep.points[end].width) for end in (0, -1))
        return {
            "always": (
                f"Even somebody sure beforehand that the effect lies within {narrowest} of zero would, "
                f"after these data, give at least {needed} to the claim that it {claim}."
            ),
            "never": (
                f"No width of prior, up to {widest} either way, brings the probability that the effect "
                f"{claim} to {needed}."
            ),
            "several": f"The probability that the effect {claim} crosses {needed} more than once.",
        }[tipping.reached]
    within = _within(compared, tipping.width)
    verdict = f"less than {needed}" if tipping.reached_when == "wider" else f"{needed} or more"
    return (
        f"Only somebody sure beforehand that the effect lies within {within} of zero would, after these "
        f"data, give {verdict} to the claim that it {claim}."
    )


def _within(compared: Compared, width: float) -> str:
    reach = numbers.given(float(f"{CENTRAL * width:.2g}"))
    return numbers.quantity(reach, compared.question.unit)


def _claim(compared: Compared, tipping: TippingPrior | NoTipping) -> str:
    main = compared.main.answer
    if tipping.claim == "beyond":
        return exceeds_words(compared.question)
    sign = sign_words(compared.question, main) if isinstance(main, PosteriorAnswer) else "in that direction"
    return f"is {sign}"


def _how_it_was_done(sweep: Sweep, scaling: PowerScaling | None) -> str:
    count, refits = numbers.count(len(sweep.points)), sweep.refits
    fits = "" if not refits else f"; {numbers.count(refits)} of them needed {_own_fits(refits)}"
    text = (
        f"“Sure” is read as a prior with 95{numbers.THIN}% of its probability there. The sweep re-weights "
        f"the draws to {count} widths{fits}."
    )
    return text if scaling is None else f"{text} {_power_scaling(scaling)}"


def _own_fits(refits: int) -> str:
    return "a fit of its own" if refits == 1 else "fits of their own"


def _power_scaling(scaling: PowerScaling) -> str:
    words = {
        "none": "the prior hardly moves this answer",
        "prior and data both matter": "prior and data both matter, and may pull against each other",
        "prior dominates": "the prior dominates a likelihood that says little",
    }[scaling.diagnosis]
    return (
        f"Power-scaling sensitivity (Kallioinen et al. 2024) is {numbers.sensitivity(scaling.prior)} to the "
        f"prior and {numbers.sensitivity(scaling.likelihood)} to the likelihood; from "
        f"{numbers.given(POWER_SCALING_THRESHOLD)} up an answer counts as sensitive: {words}."
    )
