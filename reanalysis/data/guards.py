"""Stop a file that unpacks to far more than it should before memory is spent on it."""

from __future__ import annotations

import io
import zipfile
from pathlib import Path
from typing import Any, Protocol

from reanalysis.data.limits import DEFAULT_LIMITS, Limits

_PIECE = 1 << 16
_MAX_MEMBERS = 2_000


class TooLargeError(Exception):
    """A limit was passed; the reader of the format turns it into a `DataError`."""

    def __init__(self, found: str, allowed: str) -> None:
        super().__init__(found)
        self.allowed = allowed


def check_unpacked(unpacked: int, packed: int, limits: Limits) -> None:
    """Compare what came out of a compressed file so far with what is allowed.

    Raises
    ------
    TooLargeError
        When it is too much, or suspiciously much for the file's size.
    """
    if unpacked > limits.unpacked_bytes:
        raise TooLargeError(
            f"the file unpacks to more than {limits.unpacked_bytes:,} bytes",
            f"at most {limits.unpacked_bytes:,} bytes",
        )
    if unpacked > limits.ratio_from and unpacked > limits.ratio * max(packed, 1):
        raise TooLargeError(
            f"the file unpacks to more than {limits.ratio} times its size",
            f"at most {limits.ratio} times, which data do not reach",
        )


class _Source(Protocol):
    def read(self, size: int, /) -> bytes: ...


class CappedReader(io.RawIOBase):
    """A binary stream that gives up once too much has come out of it.

    Parameters
    ----------
    source : binary file
    packed : int or None
        Size of the compressed file; None when the source is not compressed.
    limits : Limits
    """

    def __init__(self, source: _Source, packed: int | None, limits: Limits) -> None:
        super().__init__()
        self._source = source
        self._packed = packed
        self._limits = limits
        self._count = 0

    def readable(self) -> bool:
        """Say that this can be read."""
        return True

    def readinto(self, buffer: Any) -> int:
        """Read into a buffer; raises TooLargeError past a limit."""
        piece = self._source.read(len(buffer))
        buffer[: len(piece)] = piece
        self._count += len(piece)
        check_unpacked(self._count, self._count if self._packed is None else self._packed, self._limits)
        return len(piece)


def check_zip(path: Path, limits: Limits = DEFAULT_LIMITS) -> None:
    """Check what a zip file declares, then what really comes out of it.

    Parameters
    ----------
    path : Path
    limits : Limits

    Raises
    ------
    TooLargeError
        When it unpacks to too much.
    zipfile.BadZipFile, zlib.error, OSError, NotImplementedError, RuntimeError
        When it is broken, encrypted or compressed in an unknown way.
    """
    with zipfile.ZipFile(path) as archive:
        members = archive.infolist()
        if len(members) > _MAX_MEMBERS:
            raise TooLargeError(f"{len(members):,} parts in the file", f"at most {_MAX_MEMBERS:,}")
        packed = path.stat().st_size
        check_unpacked(sum(member.file_size for member in members), packed, limits)
        # Declared sizes can lie, so count what really comes out.
        unpacked = 0
        for member in members:
            with archive.open(member) as stream:
                while piece := stream.read(_PIECE):
                    unpacked += len(piece)
                    check_unpacked(unpacked, packed, limits)
                    if b"<!DOCTYPE" in piece or b"<!ENTITY" in piece:
                        raise zipfile.BadZipFile("it declares XML entities")
