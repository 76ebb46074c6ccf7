"""Limits on what may come out of a compressed file."""

from __future__ import annotations

import io
import zipfile
from pathlib import Path

import pytest

from reanalysis.data.guards import CappedReader, TooLargeError, check_unpacked, check_zip
from reanalysis.data.limits import DEFAULT_LIMITS, Limits

LIMITS = Limits(unpacked_bytes=1000, ratio=10, ratio_from=100)


def test_size_and_ratio_are_judged_at_their_bounds() -> None:
    """What is exactly allowed passes, one byte more does not; small files may have any ratio."""
    check_unpacked(1000, 100, LIMITS)
    check_unpacked(100, 1, LIMITS)
    with pytest.raises(TooLargeError, match="more than 1,000 bytes"):
        check_unpacked(1001, 1000, LIMITS)
    with pytest.raises(TooLargeError, match="more than 10 times its size"):
        check_unpacked(501, 50, LIMITS)


def test_a_stream_ends_once_too_much_came_out() -> None:
    """A capped stream gives what it is asked for until the limit is passed."""
    whole = CappedReader(io.BytesIO(b"ab" * 500), None, LIMITS)
    assert io.BufferedReader(whole).read() == b"ab" * 500

    with pytest.raises(TooLargeError, match="more than 1,000 bytes"):
        io.BufferedReader(CappedReader(io.BytesIO(b"a" * 1001), None, LIMITS)).read()
    with pytest.raises(TooLargeError, match="more than 10 times"):
        io.BufferedReader(CappedReader(io.BytesIO(b"a" * 200), 19, LIMITS)).read()


def test_ordinary_zip_files_pass(tmp_path: Path) -> None:
    """A zip whose parts are as large as they say is no problem."""
    with zipfile.ZipFile(tmp_path / "a.zip", "w") as archive:
        archive.writestr("a", "x" * 500)
        archive.writestr("b", "y" * 500)

    check_zip(tmp_path / "a.zip", DEFAULT_LIMITS)
    check_zip(tmp_path / "a.zip", LIMITS)
    with pytest.raises(TooLargeError, match="more than 999 bytes"):
        check_zip(tmp_path / "a.zip", Limits(unpacked_bytes=999))
