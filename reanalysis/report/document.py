"""From an analysis to the whole report as plain data."""

from __future__ import annotations

from reanalysis.analysis.result import Analysis
from reanalysis.report import numbers
from reanalysis.report.blocks import Document
from reanalysis.report.context import Context
from reanalysis.report.sections.answers import answers_section, status_line
from reanalysis.report.sections.checks import computation_section, fit_section
from reanalysis.report.sections.prior import prior_section
from reanalysis.report.sections.record import record_section
from reanalysis.report.sections.side_by_side import side_by_side_section
from reanalysis.report.sections.size import size_section
from reanalysis.report.wording import CAUTIONS


def build_document(analysis: Analysis) -> Document:
    """Build the report of an analysis.

    Parameters
    ----------
    analysis : Analysis

    Returns
    -------
    Document
        Sections in the reader's order; those about questions are absent when there are none.
    """
    context = Context(analysis)
    sections = (
        answers_section(context),
        side_by_side_section(context),
        size_section(context),
        prior_section(context),
        fit_section(context),
        computation_section(context),
        record_section(context),
    )
    return Document(
        title=analysis.prepared.study.spec.title,
        kicker="Re-analysis report",
        byline=_byline(analysis),
        language="en-GB",
        status=status_line(context),
        sections=tuple(section for section in sections if section is not None),
        cautions=CAUTIONS,
    )


def _byline(analysis: Analysis) -> str:
    spec = analysis.prepared.study.spec
    parts = []
    if spec.client:
        parts.append(f"Prepared for {spec.client}")
    if spec.author:
        parts.append(spec.author)
    if spec.date:
        parts.append(spec.date)
    parts.append(f"{numbers.count(analysis.prepared.design.rows.used)} rows")
    questions = len(analysis.questions)
    parts.append("1 question" if questions == 1 else f"{numbers.count(questions)} questions")
    return " · ".join(parts)
