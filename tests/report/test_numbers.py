"""Numbers as text."""

from __future__ import annotations

import math
import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reanalysis.report import numbers as num

T = num.THIN
M = num.MINUS
finite = st.floats(min_value=-1e300, max_value=1e300)
any_float = st.floats()
decimals = st.integers(min_value=0, max_value=num.MAX_DECIMALS)
shares = st.floats(min_value=0.0, max_value=1.0)

SUPERSCRIPTS = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")


def read(text):
    """The number that a reader sees."""
    text = text.replace(M, "-").replace("∞", "inf")
    mantissa, times, power = text.replace(T, "").partition("×10")
    return float(mantissa) * (10.0 ** int(power.translate(SUPERSCRIPTS)) if times else 1.0)


@pytest.mark.parametrize(
    ("spread", "mcses", "expected"),
    [
        (1.1, (), 1),
        (0.0184, (), 3),
        (0.0996, (), 2),
        (28.0, (), 0),
        (280.0, (), 0),
        (1.1, (0.05,), 1),
        (1.1, (0.051,), 0),
        (0.0184, (0.0002, 0.004), 2),
        (math.nan, (), 2),
        (math.inf, (0.004,), 2),
        (0.0, (0.0, math.nan), 2),
        (1e-30, (), num.MAX_DECIMALS),
    ],
)
def test_decimals_come_from_spread_and_monte_carlo_error(spread, mcses, expected):
    """Two digits of the standard error, and no digit worth less than two Monte Carlo errors."""
    assert num.choose_decimals(spread, *mcses) == expected


@given(st.floats(min_value=1e-6, max_value=1e6), st.floats(min_value=1e-6, max_value=0.49))
def test_the_last_decimal_is_worth_two_monte_carlo_errors(spread, mcse):
    """10^-d is at least twice the Monte Carlo error whatever the spread, if there are decimals."""
    d = num.choose_decimals(spread, mcse)
    assert d == 0 or 10.0**-d >= 2.0 * mcse * (1.0 - 1e-8)


@pytest.mark.parametrize(
    ("value", "places", "expected"),
    [
        (2.47, 1, "2.5"),
        (-0.109, 3, f"{M}0.109"),
        (-0.0, 2, "0.00"),
        (-0.001, 2, "0.00"),
        (math.nan, 2, "–"),
        (math.inf, 2, "∞"),
        (-math.inf, 2, f"{M}∞"),
        (12345.678, 1, f"12{T}345.7"),
        (3.2e-6, 7, f"3.2{T}×{T}10⁻⁶"),
        (3.2e-6, 2, "0.00"),
        (-4.56e9, 0, f"{M}4.56{T}×{T}10⁹"),
        (1e-320, 3, "0.000"),
    ],
)
def test_estimate(value, places, expected):
    """Signs, thousands, powers of ten and what is not a number."""
    assert num.estimate(value, places) == expected


@given(finite, decimals)
def test_an_estimate_reads_as_its_value(value, places):
    """What is printed differs from the value by half of the last printed digit at most."""
    text = num.estimate(value, places)
    if "×" in text:
        assert read(text) == pytest.approx(value, rel=0.06)
    else:
        assert abs(read(text) - value) <= 0.5000001 * 10.0**-places


@given(any_float, decimals)
def test_no_number_is_minus_zero_or_a_machine_word(value, places):
    """Never −0.00, e-notation, nan or inf; the minus sign is the typographic one."""
    text = num.estimate(value, places)
    assert not re.search(r"[a-zA-Z-]", text)
    assert not re.fullmatch(rf"{M}0\.?0*", text)


@given(finite, finite, st.integers(min_value=0, max_value=6))
def test_both_limits_of_an_interval_have_the_same_decimals(low, high, places):
    """The limits are written alike, and in order."""
    low, high = min(low, high), max(low, high)
    first, second = num.interval(low, high, places).split(" to ")
    assert len(first.partition("×")[0].strip(T).partition(".")[2]) == len(
        second.partition("×")[0].strip(T).partition(".")[2]
    )
    assert read(first) <= read(second)


def test_interval_examples():
    """An interval reads as in prose; small limits share one power of ten."""
    assert num.interval(0.234, 4.71, 1) == "0.2 to 4.7"
    assert num.interval(-0.1449, -0.0731, 3) == f"{M}0.145 to {M}0.073"
    assert num.interval(-math.inf, 3.21, 1) == f"{M}∞ to 3.2"
    assert num.interval(math.nan, 1.0, 1) == "–"
    assert num.interval(2e-8, 4.3e-6, 8) == f"0.02{T}×{T}10⁻⁶ to 4.30{T}×{T}10⁻⁶"


@pytest.mark.parametrize(
    ("p", "expected"),
    [
        (0.0303, "0.030"),
        (0.237, "0.24"),
        (0.0499, "0.0499"),
        (0.0501, "0.0501"),
        (0.004, "0.0040"),
        (0.0995, "0.10"),
        (0.00099, f"<{T}0.001"),
        (0.0, f"<{T}0.001"),
        (1e-320, f"<{T}0.001"),
        (0.9949, "0.99"),
        (0.996, f">{T}0.99"),
        (1.0, f">{T}0.99"),
        (math.nan, "–"),
    ],
)
def test_p_value(p, expected):
    """Two digits, three beside 0.05, never 0 and never 1."""
    assert num.p_value(p) == expected


@given(st.floats(min_value=0.001, max_value=0.99))
def test_rounding_never_moves_a_p_value_across_0_05(p):
    """Whatever is printed lies on the same side of 0.05 as the value, to four decimals."""
    shown = read(num.p_value(p))
    assert (shown < 0.05) <= (p < 0.05005)
    assert (shown > 0.05) <= (p > 0.04995)


def test_p_equation():
    """The letter, the sign and the number hold together without a line break."""
    assert num.p_equation(0.0303) == f"p{T}={T}0.030"
    assert num.p_equation(0.0001) == f"p{T}<{T}0.001"
    assert " " not in num.p_equation(0.5)


@pytest.mark.parametrize(
    ("value", "mcse", "expected"),
    [
        (0.6612, 0.008, "0.66"),
        (0.9962, 0.0004, "0.996"),
        (0.9962, 0.0009, f">{T}0.99"),
        (0.9912, 0.0009, "0.99"),
        (0.9997, 0.0001, f">{T}0.999"),
        (1.0, 0.0, f">{T}0.999"),
        (1.0, math.nan, f">{T}0.999"),
        (0.0, 0.0, f"<{T}0.001"),
        (0.0031, 0.0003, "0.003"),
        (0.0031, 0.001, f"<{T}0.01"),
        (math.nan, 0.1, "–"),
    ],
)
def test_probability(value, mcse, expected):
    """Two decimals, three near the ends when the draws support them, never certain."""
    assert num.probability(value, mcse) == expected


@given(shares, st.floats(min_value=0.0, max_value=0.05))
def test_a_probability_is_never_zero_or_one(value, mcse):
    """No number of draws makes anything certain, and what is printed is near the value."""
    text = num.probability(value, mcse)
    shown = float(re.sub(r"[<>\s]", "", text))
    assert 0.0 < shown < 1.0
    assert abs(shown - value) <= 0.0100001


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (0.95, "95"),
        (0.29, "29"),
        (0.57, "57"),
        (0.575, "57.5"),
        (0.975, "97.5"),
        (0.999, "99.9"),
        (0.5, "50"),
    ],
)
def test_level(value, expected):
    """The label of an interval is the level that was asked for, not a truncated one."""
    assert num.level(value) == f"{expected}{T}%"


@given(st.integers(min_value=1, max_value=999))
def test_every_level_of_three_digits_is_printed_exactly(thousandths):
    """0.001 to 0.999: the percentage is the exact tenth."""
    whole, tenth = divmod(thousandths, 10)
    expected = f"{whole}.{tenth}" if tenth else str(whole)
    assert num.level(thousandths / 1000.0) == f"{expected}{T}%"


def test_small_formats():
    """Counts, quantities, durations, sizes, given numbers and checksums."""
    assert num.count(12480) == f"12{T}480"
    assert num.count(-999) == f"{M}999"
    assert num.quantity("2", "N") == f"2{T}N"
    assert num.quantity("2", "") == "2"
    assert num.percent(0.1234, 1) == f"12.3{T}%"
    assert num.percent(0.0) == f"0{T}%"
    assert num.percent(1.0) == f"100{T}%"
    assert num.rhat(1.00321) == "1.003"
    assert [num.duration(s) for s in (0.44, 9.96, 59.7, 185.0, 7620.0, math.nan)] == [
        f"0.4{T}s", f"10{T}s", f"1{T}min 00{T}s", f"3{T}min 05{T}s", f"2{T}h 07{T}min", "–",
    ]  # fmt: skip
    assert [num.file_size(s) for s in (512, 12_400, 3_400_000)] == [f"512{T}bytes", f"12{T}kB", f"3.4{T}MB"]
    assert [num.given(v) for v in (2.0, 0.05, 0.1 + 0.2, -1.5, 0.0, 1e-7, 3e8)] == [
        "2", "0.05", "0.3", f"{M}1.5", "0", f"1{T}×{T}10⁻⁷", f"3{T}×{T}10⁸",
    ]  # fmt: skip


@settings(max_examples=200)
@given(finite.filter(lambda value: value == 0.0 or abs(value) > 1e-300))
def test_a_given_number_keeps_six_digits(value):
    """What somebody wrote is repeated to six significant digits."""
    assert read(num.given(value)) == pytest.approx(value, rel=5.1e-6)
