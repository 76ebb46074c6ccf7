"""Section 3: how sure, how big."""

from __future__ import annotations

from reanalysis.report import pictures, tables
from reanalysis.report.blocks import Block, Paragraph, Section
from reanalysis.report.context import Context


def size_section(context: Context) -> Section | None:
    """Each question's posterior, with the tests of the same claims; None without questions."""
    if not context.analysis.questions:
        return None
    blocks: list[Block] = [
        Paragraph(
            "A p-value says how surprising the data would be if a claim were false; a posterior probability "
            "says how credible the claim is, given data and prior. The table sets the two beside each other, "
            "claim by claim."
        ),
        tables.tests_and_probabilities(context),
    ]
    fit = context.main_fit
    if fit is not None:
        for compared in context.analysis.questions:
            figure = pictures.posterior_density(context, compared, fit)
            if figure is not None:
                blocks.append(figure)
    return Section("size", "How sure, how big", tuple(blocks))
