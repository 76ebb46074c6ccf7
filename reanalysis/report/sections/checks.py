"""Sections 7 and 8: does the model fit, and can the computation be trusted?"""

from __future__ import annotations

from reanalysis.report import pictures, tables
from reanalysis.report.blocks import Block, Definition, Definitions, Paragraph, Section, Subheading
from reanalysis.report.context import Context


def fit_section(context: Context) -> Section:
    """Residuals, one posterior predictive check, measures of the whole fit."""
    blocks: list[Block] = [pictures.residual_picture(context)]
    fit = context.main_fit
    if fit is not None:
        blocks.append(pictures.predictive_picture(context, fit))
    blocks.append(tables.goodness(context))
    return Section("fit", "Does the model fit?", tuple(blocks))


def computation_section(context: Context) -> Section:
    """Sampler diagnostics, and everything that either library or the design gave reason to say."""
    blocks: list[Block] = [tables.computation(context)]
    fit = context.main_fit
    if fit is not None:
        blocks.append(pictures.rank_picture(context, fit))
    blocks += _said(context)
    return Section("computation", "Can the computation be trusted?", tuple(blocks))


def _said(context: Context) -> list[Block]:
    findings = context.analysis.prepared.findings
    warnings = context.analysis.frequentist.warnings
    items = [Definition(finding.where, f"{finding.message} {finding.advice}") for finding in findings]
    items += [Definition("frequentist fit", warning) for warning in dict.fromkeys(warnings)]
    heading = Subheading("What the design and the fits gave reason to say")
    if not items:
        return [
            heading,
            Paragraph("Nothing: no dependent columns, no separation, no warning from either library."),
        ]
    return [heading, Definitions(tuple(items))]
