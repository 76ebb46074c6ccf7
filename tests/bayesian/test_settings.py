"""Seeds that depend on the study and the fit, and on nothing else."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from reanalysis.bayesian.settings import derive_seed


@given(base=st.integers(0, 2**31 - 1), label=st.text(max_size=30))
def test_seeds_are_what_the_sampler_takes(base: int, label: str) -> None:
    """Every derived seed is a whole number of at most 31 bits."""
    assert 0 <= derive_seed(base, label) < 2**31


def test_seeds_are_known_in_advance() -> None:
    """SHA-256 of base and label, its first 32 bits without the last: the same for everyone."""
    # From a shell: printf '1/weak' | sha256sum gives 81776f23…, half of which is 0x40bbb791.
    assert derive_seed(1, "weak") == 0x40BBB791


def test_each_fit_has_its_own_seed() -> None:
    """Base and label both matter, and where one ends and the other begins."""
    seeds = {derive_seed(b, label) for b, label in ((1, "weak"), (1, "flat"), (11, "weak"), (1, "1/weak"))}

    assert len(seeds) == 4
