"""Sections 7 and 8: whether the model fits, and whether the computation can be trusted."""

from __future__ import annotations

import math

from reanalysis.report import numbers, pictures, tables
from reanalysis.report.blocks import Block, Definition, Definitions, Paragraph, Section, Subheading
from reanalysis.report.context import Context


def fit_section(context: Context) -> Section:
    """Measures of the whole fit, residuals, one posterior predictive check."""
    blocks: list[Block] = [Definitions(_measures(context)), pictures.residual_picture(context)]
    fit = context.main_fit
    if fit is not None:
        blocks.append(pictures.predictive_picture(context, fit))
    return Section("fit", "Does the model fit?", tuple(blocks))


def computation_section(context: Context) -> Section:
    """Sampler diagnostics, and everything that either library or the design gave reason to say."""
    blocks: list[Block] = [tables.computation(context)]
    fit = context.main_fit
    if fit is not None:
        blocks.append(pictures.rank_picture(context, fit))
    blocks += _said(context)
    return Section("computation", "Can the computation be trusted?", tuple(blocks))


def _measures(context: Context) -> tuple[Definition, ...]:
    measures = context.analysis.frequentist.goodness
    unit = context.analysis.prepared.design.response.unit
    rows, df = numbers.count(measures.n), numbers.count(measures.df_residual)
    null, aic = _four(measures.null_deviance), numbers.estimate(measures.aic, 2)
    pairs = [
        ("rows", f"{rows}, with {df} residual degrees of freedom"),
        ("deviance", f"{_four(measures.deviance)}; {null} with an intercept alone"),
        ("log-likelihood", f"{numbers.estimate(measures.loglik, 2)}; AIC {aic}"),
    ]
    if measures.r_squared is None:
        ratio = numbers.estimate(measures.pearson_chi2 / measures.df_residual, 2)
        chi2 = _four(measures.pearson_chi2)
        pairs.append(("dispersion", f"Pearson chi-squared {chi2}, {ratio} per degree of freedom"))
    else:
        residual = numbers.quantity(_four(math.sqrt(measures.scale)), unit)
        pairs.append(("R²", f"{numbers.estimate(measures.r_squared, 3)} ({measures.r_squared_kind})"))
        pairs.append(("residual SD", residual))
    return tuple(Definition(term, text) for term, text in pairs)


def _four(value: float) -> str:
    return numbers.given(float(f"{value:.4g}"))


def _said(context: Context) -> list[Block]:
    findings = context.analysis.prepared.findings
    warnings = context.analysis.frequentist.warnings
    items = [Definition(finding.where, f"{finding.message} {finding.advice}") for finding in findings]
    items += [Definition("frequentist fit", warning) for warning in dict.fromkeys(warnings)]
    heading = Subheading("What the design and the fits gave reason to say")
    if not items:
        nothing = "Nothing: no dependent columns, no separation, no warning from either library."
        return [heading, Paragraph(nothing)]
    return [heading, Definitions(tuple(items))]
