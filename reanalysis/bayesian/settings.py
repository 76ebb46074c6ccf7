"""Settings of the sampler, and the seed of each fit."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class SamplerSettings:
    """Settings of one run.

    Attributes
    ----------
    seed : int
    draws, tune, chains : int
        Kept and tuning iterations of each chain; number of chains.
    target_accept : float
    low_rank : bool
        Whether the mass matrix adapts to correlated parameters.
    cores : int
        The draws are the same for any number.
    """

    seed: int
    draws: int
    tune: int
    chains: int
    target_accept: float
    low_rank: bool
    cores: int


def derive_seed(base: int, label: str) -> int:
    """Derive the seed of one fit from the study's seed and a label such as the prior set's name.

    The same pair gives the same seed whatever the order of the fits and whoever runs them.
    """
    digest = hashlib.sha256(f"{base}/{label}".encode()).digest()
    return int.from_bytes(digest[:4], "big") >> 1
