"""The parts of a document."""

from __future__ import annotations

import pytest

from reanalysis.report import blocks as b


def _rows(count):
    return [(f"row {k}", str(k)) for k in range(count)]


def test_a_table_within_the_cap_is_complete():
    """Sixty rows are shown without a hint."""
    rows, hint = b.cap_rows(_rows(60), "estimates.csv")
    assert (len(rows), hint) == (60, "")


def test_a_longer_table_says_where_the_rest_is():
    """Of sixty-one rows the first sixty are shown, and the file is named."""
    rows, hint = b.cap_rows(_rows(61), "estimates.csv")
    assert rows[-1] == ("row 59", "59")
    assert hint == "The first 60 of 61 rows; all of them are in estimates.csv."


COLUMNS = (b.TableColumn("name"), b.TableColumn("n", "none", "right"))


def test_a_table_refuses_too_many_rows():
    """The cap cannot be forgotten."""
    with pytest.raises(ValueError, match="at most 60 rows, got 61: use cap_rows"):
        b.Table(1, "Too long.", COLUMNS, tuple(_rows(61)))


def test_a_table_refuses_a_ragged_row():
    """A spanning cell counts for the cells that it replaces."""
    b.Table(1, "Fits.", COLUMNS, ((b.SpanningCell("nothing", 2),),))
    with pytest.raises(ValueError, match="a row of 3 cells in a table of 2 columns"):
        b.Table(1, "Ragged.", COLUMNS, (("a", b.SpanningCell("nothing", 2)),))


def test_groups_cover_all_columns():
    """A group heading cannot shift."""
    with pytest.raises(ValueError, match="must cover its 2 columns"):
        b.Table(1, "Shifted.", COLUMNS, (), (b.ColumnGroup("both", "none", 3),))


def test_a_figure_needs_words():
    """No picture without a text for those who cannot see it."""
    with pytest.raises(ValueError, match="alternative text"):
        b.Figure(1, "A picture.", "  ", "<svg/>")


def test_anchors_differ(document):
    """Two sections with one id are refused."""
    section = b.Section("same", "A", ())
    with pytest.raises(ValueError, match="must differ"):
        b.Document("t", "k", "", "en", document.status, (section, section))


def test_plain_text_drops_emphasis():
    """Runs are joined in order."""
    assert b.plain_text((b.Text("a "), b.Strong("b"), b.Emphasis(" c"))) == "a b c"
    assert b.plain_text("abc") == "abc"
