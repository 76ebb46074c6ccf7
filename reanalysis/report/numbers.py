"""Every number of the report becomes text here, and only here.

A number is printed with the digits that it can bear: those of an estimate from
its standard error (two significant digits of it), those of a posterior summary
also from its Monte Carlo standard error (a digit is printed only if it is worth
at least two of them). `choose_decimals` makes that choice once for a row, so that both
analyses print alike.
"""

from __future__ import annotations

import math
from decimal import Decimal

THIN = "\u202f"
"""Narrow no-break space: between a sign and its number, in thousands, before a unit."""
MINUS = "\u2212"
NO_BREAK_HYPHEN = "\u2011"
NONE = "\u2013"
"""Stands where there is no number."""

LARGE, SMALL = 1e6, 1e-4
"""From `LARGE` up and below `SMALL`, powers of ten are written out."""
MAX_DECIMALS = 12

_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def choose_decimals(spread: float, *mcses: float) -> int:
    """Return how many decimals a row's numbers are printed with.

    Parameters
    ----------
    spread : float
        Standard error or posterior standard deviation, in the unit of the numbers. Two
        significant digits of it are printed. Not finite or not positive: no say.
    *mcses : float
        Monte Carlo standard errors of the numbers in the row. The last decimal is worth at
        least two of the largest. Not finite or not positive ones have no say.

    Returns
    -------
    int
        0 to `MAX_DECIMALS`; 2 when nothing has a say.
    """
    choices = []
    if math.isfinite(spread) and spread > 0.0:
        choices.append(1 - _exponent(spread, 2))
    worst = max((mcse for mcse in mcses if math.isfinite(mcse) and mcse > 0.0), default=0.0)
    if worst > 0.0:
        choices.append(math.floor(-math.log10(2.0 * worst) + 1e-9))
    return min(max(min(choices, default=2), 0), MAX_DECIMALS)


def estimate(value: float, decimals: int) -> str:
    """Return a number with a given number of decimals: ``−0.109``, ``3.2 × 10⁻⁶``, ``∞``, ``–`` for NaN."""
    return _numbers((value,), decimals)[0]


def interval(low: float, high: float, decimals: int) -> str:
    """Return limits as ``0.2 to 4.7``, both written in the same way."""
    if math.isnan(low) or math.isnan(high):
        return NONE
    return " to ".join(_numbers((low, high), decimals))


def given(value: float) -> str:
    """Return a number that somebody wrote down (six significant digits at most): ``2``, ``0.05``."""
    if not math.isfinite(value) or value == 0.0:
        return estimate(value, 0)
    rounded = Decimal(f"{value:.6g}").normalize()
    decimals = max(-int(rounded.as_tuple().exponent), 0)
    if SMALL <= abs(value) < LARGE:
        return _fixed(value, decimals)
    digits = len(rounded.as_tuple().digits)
    return _scientific(value, _exponent(value, 6), digits - 1)


def p_value(p: float) -> str:
    """Return a p-value: ``< 0.001``, ``0.030``, ``0.24``.

    Two significant digits, three close to 0.05, so that rounding never moves a value on to the
    line that readers draw there.
    """
    if math.isnan(p):
        return NONE
    if p < 0.001:
        return f"<{THIN}0.001"
    if p >= 0.1:
        return _below_one(p, 2)
    return _fixed(p, (2 if 0.045 <= p < 0.055 else 1) - _exponent(p, 2))


def p_equation(p: float) -> str:
    """Return a p-value with its letter: ``p = 0.030``, ``p < 0.001``; without line breaks."""
    text = p_value(p)
    return f"p{THIN}{text}" if text[0] in "<>" else f"p{THIN}={THIN}{text}"


def probability(value: float, mcse: float = math.nan) -> str:
    """Return a posterior probability, never as 0 or 1: ``0.66``, ``0.996``, ``> 0.999``.

    Parameters
    ----------
    value : float
        Between 0 and 1.
    mcse : float
        Its Monte Carlo standard error. Near the ends a third decimal is printed if it is worth
        two of them; NaN or zero is taken to support it.
    """
    if math.isnan(value):
        return NONE
    supported = not mcse > 0.0005
    near_an_end = value < 0.015 or value >= 0.985
    return _below_one(value, 3 if near_an_end and supported else 2)


def level(value: float) -> str:
    """Return the level of an interval: ``95 %``, ``97.5 %``."""
    return percent(value, 6)


def percent(share: float, decimals: int = 0) -> str:
    """Return a share of one in per cent with at most the given decimals: ``12.5 %``."""
    if not math.isfinite(share):
        return NONE
    # repr gives the digits that were meant: 0.575 * 100 is 57.49999999999999 in binary.
    exact = Decimal(repr(share)) * 100
    rounded = round(exact, decimals).normalize()
    return f"{rounded:f}".replace("-", MINUS) + f"{THIN}%" if rounded else f"0{THIN}%"


def count(value: float) -> str:
    """Return a whole number with thin spaces between thousands: ``12 480``."""
    if not math.isfinite(value):
        return estimate(value, 0)
    return f"{round(value):,}".replace(",", THIN).replace("-", MINUS)


def quantity(text: str, unit: str) -> str:
    """Return a formatted number with its unit, if it has one: ``2 N``; a hyphen in it breaks no line."""
    return f"{text}{THIN}{unit.replace('-', NO_BREAK_HYPHEN)}" if unit else text


def ratio(value: float) -> str:
    """Return a ratio of odds, rates or hazards: ``0.43``, ``1.03``, ``12.3``, ``245``, ``0.0031``."""
    if not math.isfinite(value) or value >= LARGE or value < 0.01:
        return given(float(f"{value:.2g}")) if math.isfinite(value) else estimate(value, 0)
    return estimate(value, 2 if value < 10.0 else 1 if value < 100.0 else 0)


def sensitivity(value: float) -> str:
    """Return a sensitivity with three decimals, never as 0: ``0.077``, ``< 0.001``."""
    return f"<{THIN}0.001" if value < 0.0005 else estimate(value, 3)


def rhat(value: float) -> str:
    """Return an R-hat with three decimals: ``1.003``."""
    return estimate(value, 3)


def duration(seconds: float) -> str:
    """Return a duration: ``0.4 s``, ``12 s``, ``3 min 05 s``, ``2 h 07 min``."""
    if not math.isfinite(seconds) or seconds < 0.0:
        return NONE
    if seconds < 9.95:
        return f"{seconds:.1f}{THIN}s"
    whole = round(seconds)
    if whole < 60:
        return f"{whole}{THIN}s"
    if whole < 3600:
        return f"{whole // 60}{THIN}min {whole % 60:02d}{THIN}s"
    minutes = round(seconds / 60.0)
    return f"{minutes // 60}{THIN}h {minutes % 60:02d}{THIN}min"


def file_size(size: int) -> str:
    """Return a number of bytes: ``512 bytes``, ``12 kB``, ``3.4 MB``."""
    if size < 1000:
        return f"{size}{THIN}bytes"
    if size < 999_500:
        return f"{size / 1000:.0f}{THIN}kB"
    return f"{count(size // 1_000_000) if size >= 100_000_000 else f'{size / 1e6:.1f}'}{THIN}MB"


def _numbers(values: tuple[float, ...], decimals: int) -> tuple[str, ...]:
    """Write numbers alike: all fixed, or all with the power of ten of the largest."""
    largest = max((abs(value) for value in values if math.isfinite(value)), default=0.0)
    if largest >= LARGE or (0.0 < largest < SMALL and largest >= 10.0**-decimals):
        exponent = _exponent(largest, 3)
        places = min(max(decimals + exponent, 0), 2)
        return tuple(_scientific(value, exponent, places) for value in values)
    return tuple(_fixed(value, decimals) for value in values)


def _fixed(value: float, decimals: int) -> str:
    if math.isnan(value):
        return NONE
    if math.isinf(value):
        return "∞" if value > 0 else f"{MINUS}∞"
    text = f"{abs(value):.{decimals}f}"
    whole, point, rest = text.partition(".")
    if len(whole) > 3:
        whole = f"{int(whole):,}".replace(",", THIN)
    negative = value < 0.0 and any(digit in "123456789" for digit in text)
    return f"{MINUS if negative else ''}{whole}{point}{rest}"


def _scientific(value: float, exponent: int, places: int) -> str:
    if not math.isfinite(value):
        return _fixed(value, 0)
    # Decimal, as 10.0**exponent overflows or vanishes at the ends of the range.
    mantissa = Decimal(value).scaleb(-exponent)
    text = f"{abs(mantissa):.{places}f}"
    negative = value < 0.0 and any(digit in "123456789" for digit in text)
    power = str(exponent).translate(_SUPERSCRIPTS)
    return f"{MINUS if negative else ''}{text}{THIN}×{THIN}10{power}"


def _exponent(value: float, digits: int) -> int:
    """Power of ten of a number once it is rounded to some significant digits (0.0996 -> 0.10 -> −1)."""
    return int(f"{value:.{digits - 1}e}".partition("e")[2])


def _below_one(value: float, decimals: int) -> str:
    """Write a probability without ever writing 0 or 1."""
    step = 10.0**-decimals
    if value < step / 2.0 or (decimals == 3 and value < step):
        return f"<{THIN}{step:.{decimals}f}"
    if value >= 1.0 - step / 2.0 or (decimals == 3 and value > 1.0 - step):
        return f">{THIN}{1.0 - step:.{decimals}f}"
    return _fixed(value, decimals)
