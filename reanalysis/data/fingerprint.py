"""SHA-256 and size of a file, read in pieces."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path

_PIECE = 1 << 20


@dataclass(frozen=True, slots=True)
class Fingerprint:
    """What identifies a file's bytes: SHA-256 (hexadecimal) and size in bytes."""

    sha256: str
    size: int


def fingerprint(path: Path) -> Fingerprint:
    """Hash a file without holding it in memory.

    Parameters
    ----------
    path : Path
        An ordinary file.

    Raises
    ------
    OSError
        When it cannot be read.
    """
    digest = hashlib.sha256()
    size = 0
    with path.open("rb") as file:
        while piece := file.read(_PIECE):
            digest.update(piece)
            size += len(piece)
    return Fingerprint(digest.hexdigest(), size)
