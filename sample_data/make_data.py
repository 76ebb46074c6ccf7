"""Write the three sample tables: invented records of an invented growers' cooperative.

Run from anywhere::

    python sample_data/make_data.py [FOLDER]

writes ``firmness.csv``, ``storage_rot.csv`` and ``spots.csv`` into the folder, by
default this one. The numbers are drawn with a fixed seed: the same files, byte for byte,
every time. `README.md` beside this script describes the columns.
"""

from __future__ import annotations

import csv
import sys
from collections.abc import Iterable, Sequence
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

Row = Sequence[object]

SEED = 20251124
STORES = ("Millbrook", "Upper Lathe")
BLOCKS = (("Sike", 70), ("Long Acre", 115), ("Far Croft", 180), ("Beacon", 260))
"""Orchard blocks with the altitude of their lowest row, in metres."""


def main(arguments: Sequence[str]) -> None:
    """Write all tables into the folder named by the first argument, or beside this script."""
    folder = Path(arguments[0]) if arguments else Path(__file__).resolve().parent
    _write(folder / "firmness.csv", ("crate", "store", "liner", "days", "firmness"), firmness_rows())
    _write(folder / "storage_rot.csv", ("crate", "store", "dip", "starch", "rotted"), storage_rot_rows())
    _write(folder / "spots.csv", ("crate", "block", "altitude", "net", "apples", "spots"), spots_rows())


def firmness_rows() -> list[Row]:
    """Return 96 crates of stored apples: flesh firmness in newtons after some days in store.

    Film keeps apples about 6 N firmer than no liner, foam does next to nothing; a
    day in store costs about 0.09 N. Four readings are missing.
    """
    random = np.random.default_rng(SEED)
    liner = random.permutation(np.repeat(["none", "film", "foam"], 32))
    days = random.integers(21, 176, size=liner.size)
    gain = np.select([liner == "film", liner == "foam"], [6.2, 0.2], 0.0)
    firmness = 76.0 + gain - 0.09 * days + random.normal(0.0, 3.2, size=liner.size)
    readings = [f"{value:.1f}" for value in firmness]
    for lost in random.choice(liner.size, size=4, replace=False):
        readings[lost] = ""
    return list(
        zip(_crates(2001, liner.size), _stores(random, liner.size), liner, days, readings, strict=True)
    )


def storage_rot_rows() -> list[Row]:
    """Return 104 crates: whether rot was found after 120 days, with and without a hot-water dip.

    The dip lowers the log-odds of rot by about 0.8; riper apples (higher starch
    index) rot more. So few crates leave the answer open to what was believed before.
    """
    random = np.random.default_rng(SEED)
    dip = random.permutation(np.repeat(["none", "hot_water"], 52))
    starch = np.clip(np.round(random.normal(5.5, 1.4, size=dip.size) * 2.0) / 2.0, 1.0, 10.0)
    log_odds = -0.3 - 0.8 * (dip == "hot_water") + 0.25 * (starch - 5.5)
    rotted = np.where(random.random(dip.size) < 1.0 / (1.0 + np.exp(-log_odds)), "yes", "no")
    return list(zip(_crates(3001, dip.size), _stores(random, dip.size), dip, starch, rotted, strict=True))


def spots_rows() -> list[Row]:
    """Return 240 crates: bitter-pit spots counted on the apples inspected, under hail net or none.

    The net lowers the rate of spots by some 8 %, which so many apples show clearly
    although nobody would buy nets for it; spots rise slowly with altitude.
    """
    random = np.random.default_rng(SEED)
    block = random.integers(0, len(BLOCKS), size=240)
    altitude = np.array([low for _, low in BLOCKS])[block] + random.integers(0, 45, size=block.size)
    net = random.permutation(np.repeat(["none", "hail"], block.size // 2))
    apples = random.integers(80, 126, size=block.size)
    rate = 0.21 * np.exp(-0.08 * (net == "hail") + 0.0006 * (altitude - 180.0))
    spots = random.poisson(rate * apples)
    names = [BLOCKS[index][0] for index in block]
    return list(zip(_crates(5001, block.size), names, altitude, net, apples, spots, strict=True))


def _crates(first: int, count: int) -> list[str]:
    return [f"CV-{number}" for number in range(first, first + count)]


def _stores(random: np.random.Generator, count: int) -> NDArray[np.str_]:
    return random.choice(np.array(STORES), size=count)


def _write(path: Path, header: Sequence[str], rows: Iterable[Row]) -> None:
    with path.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(rows)


if __name__ == "__main__":
    main(sys.argv[1:])
