"""Make the tables of the sample round ``chemistry_q4``.

Every result in these tables is invented: no patient, no laboratory, no analyser and no reagent stands behind them, and
"Quillfen District Laboratory" does not exist. The numbers come from the seeded generator below, with the troubles of
real validation work put in by hand, each at the place that the comments name.

Run it from anywhere; it writes the same bytes each time:

    python sample_runs/make_chemistry_q4.py [FOLDER]
"""

from __future__ import annotations

import csv
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

SEED = 20261201
Array = npt.NDArray[np.float64]
EXCLUSION = ("exclude", "excluded_by", "excluded_on")
Truth = Callable[[np.random.Generator, int], Array]

# working days of November 2026, from Monday the 2nd
DAYS = tuple(f"2026-11-{day:02d}" for day in (2, 3, 4, 5, 6, 9, 10, 11))


@dataclass(frozen=True, slots=True)
class Procedure:
    """How an invented procedure errs: ``intercept + slope * truth``, then a day's shift, then a result's own error."""

    name: str
    intercept: float = 0.0
    slope: float = 1.0
    sd: float = 0.0
    cv: float = 0.0
    day_cv: float = 0.004


@dataclass(frozen=True, slots=True)
class Comparison:
    """One analyte's comparison: how many specimens, over which days, by which procedures."""

    analyte: str
    first: int  # number of the first specimen
    n: int
    decimals: int
    truth: Truth
    procedures: tuple[Procedure, ...]
    days: Sequence[str] = DAYS
    replicates: int = 1
    below: float | None = None  # end of the measuring interval: results under it are written "<0.5"
    above: float | None = None
    serial: int = 0  # so many specimens at the start come in pairs, two from one patient


@dataclass(frozen=True, slots=True)
class Row:
    """One measurement as it will stand in comparison.csv."""

    analyte: str
    specimen: str
    procedure: str
    replicate: int
    result: str
    day: str
    subject: str
    exclude: str = ""
    excluded_by: str = ""
    excluded_on: str = ""


@dataclass(frozen=True, slots=True)
class Person:
    """One reference individual as it will stand in reference.csv."""

    analyte: str
    subject: str
    sex: str
    age: int
    result: str
    exclude: str = ""
    excluded_by: str = ""
    excluded_on: str = ""


def log_normal(median: float, spread: float, low: float, high: float) -> Truth:
    """Log-normal concentrations cut at ``low`` and ``high``; ``spread`` is the SD of the natural logarithm."""

    def draw(rng: np.random.Generator, n: int) -> Array:
        values = np.exp(rng.normal(np.log(median), spread, 40 * n + 200))
        return values[(values >= low) & (values <= high)][:n]

    return draw


def bell(mean: float, sd: float, low: float, high: float) -> Truth:
    """Normal concentrations cut at ``low`` and ``high``."""

    def draw(rng: np.random.Generator, n: int) -> Array:
        values = rng.normal(mean, sd, 40 * n + 200)
        return values[(values >= low) & (values <= high)][:n]

    return draw


def chosen(low: float, high: float, *, decades: bool = False) -> Truth:
    """Concentrations chosen to cover the range, evenly or evenly over the decades, as a validation plan asks for."""

    def draw(rng: np.random.Generator, n: int) -> Array:
        share = (np.arange(n) + rng.uniform(0.0, 1.0, n)) / n
        return low * (high / low) ** share if decades else low + (high - low) * share

    return draw


COMPARISONS = (
    # duplicates by both procedures; a small bias well inside the allowance
    Comparison("Creatinine", 1001, 60, 0, log_normal(105, 0.75, 38, 900), replicates=2, procedures=(
        Procedure("Procedure A", sd=1.5, cv=0.018), Procedure("Procedure B", 1.0, 1.004, sd=1.5, cv=0.018))),
    # two candidates, of which the second reads high
    Comparison("Glucose", 2001, 80, 1, log_normal(6.8, 0.5, 2.4, 24), procedures=(
        Procedure("Procedure A", sd=0.05, cv=0.015), Procedure("Procedure B", 0.03, 1.0, sd=0.05, cv=0.015),
        Procedure("Procedure C", 0.1, 1.085, sd=0.08, cv=0.025))),
    # a narrow range in whole numbers; three days only
    Comparison("Sodium", 3001, 50, 0, bell(139, 4.2, 126, 152), days=DAYS[:3], procedures=(
        Procedure("Procedure A", sd=0.8, day_cv=0.001), Procedure("Procedure B", sd=0.8, day_cv=0.001))),
    Comparison("Potassium", 4001, 45, 1, chosen(2.7, 4.7), days=DAYS[:4], procedures=(
        Procedure("Procedure A", sd=0.06), Procedure("Procedure B", 0.02, 1.0, sd=0.06))),
    # reads high at low concentrations and low at high ones
    Comparison("Calcium", 5001, 48, 2, chosen(1.75, 3.05), procedures=(
        Procedure("Procedure A", sd=0.02, day_cv=0.002), Procedure("Procedure B", 0.40, 0.82, sd=0.02, day_cv=0.002))),
    # two decades, the error grows with the concentration; nothing above about 700
    Comparison("ALT", 6001, 120, 0, chosen(8, 700, decades=True), procedures=(
        Procedure("Procedure A", sd=0.7, cv=0.045), Procedure("Procedure B", 0.3, 1.02, sd=0.7, cv=0.045))),
    # censored at both ends by both procedures
    Comparison("CRP", 7001, 90, 1, chosen(0.25, 380, decades=True), below=0.5, above=300, procedures=(
        Procedure("Procedure A", sd=0.1, cv=0.04), Procedure("Procedure B", 0.05, 1.01, sd=0.1, cv=0.04))),
    # two and a half decades, proportional error, some patients gave two specimens
    Comparison("Ferritin", 8001, 64, 1, chosen(4, 1200, decades=True), serial=16, procedures=(
        Procedure("Procedure A", cv=0.06), Procedure("Procedure B", -0.4, 1.045, cv=0.07))),
    # all on two days
    Comparison("Cortisol", 9001, 44, 0, chosen(40, 900, decades=True), days=DAYS[:2], procedures=(
        Procedure("Procedure A", cv=0.045, day_cv=0.01), Procedure("Procedure B", 9.0, 1.02, cv=0.05, day_cv=0.01))),
    # the study was ended after 14 specimens; nobody wrote down the days
    Comparison("HbA1c", 10001, 14, 0, log_normal(50, 0.25, 32, 98), days=("",), procedures=(
        Procedure("Procedure A", cv=0.012), Procedure("Procedure B", 0.5, 1.0, cv=0.012))),
    # no criterion in the plan
    Comparison("Albumin", 11001, 42, 1, bell(38, 5.5, 19, 51), days=("",), procedures=(
        Procedure("Procedure A", cv=0.018), Procedure("Procedure B", 0.6, 0.97, cv=0.018))),
)

# a middleware export: one column a procedure, semicolons, decimal commas
UREA = Comparison("Urea", 12001, 48, 1, log_normal(7.2, 0.6, 1.9, 38), days=DAYS[:6], procedures=(
    Procedure("Procedure A", sd=0.08, cv=0.015), Procedure("Procedure B", 0.05, 1.005, sd=0.08, cv=0.015)))


def write_result(value: float, study: Comparison) -> str:
    """A result as a laboratory system writes it: rounded, and ``<`` or ``>`` outside the measuring interval."""
    if study.below is not None and value < study.below:
        return f"<{study.below:g}"
    if study.above is not None and value > study.above:
        return f">{study.above:g}"
    return f"{value:.{study.decimals}f}"


def compare(study: Comparison, rng: np.random.Generator) -> list[Row]:
    """Measure every specimen by every procedure."""
    truth = study.truth(rng, study.n)
    rng.shuffle(truth)  # specimens come in no order of concentration
    day_of = np.arange(study.n) * len(study.days) // study.n
    rows = []
    for procedure in study.procedures:
        of_day = rng.normal(0.0, procedure.day_cv, len(study.days))
        for i, value in enumerate(truth):
            expected = (procedure.intercept + procedure.slope * value) * (1.0 + of_day[day_of[i]])
            for replicate in range(1, study.replicates + 1):
                error = rng.normal(0.0, np.hypot(procedure.sd, procedure.cv * value))
                number = study.first + i
                subject = f"P{study.first + (i // 2 if i < study.serial else i)}" if study.serial else ""
                rows.append(Row(study.analyte, f"{number:05d}", procedure.name, replicate,
                                write_result(max(expected + error, 0.0), study), study.days[day_of[i]], subject))
    return sorted(rows, key=lambda row: (row.specimen, row.procedure, row.replicate))


def change(rows: list[Row], specimen: int, procedure: str, **what: str) -> None:
    """Alter the rows of one specimen and procedure; the specimen must exist."""
    places = [i for i, row in enumerate(rows) if row.specimen == f"{specimen:05d}" and row.procedure == procedure]
    if not places:
        raise KeyError(specimen)
    for i in places:
        rows[i] = replace(rows[i], **what)  # type: ignore[arg-type]


def drop(rows: list[Row], specimen: int, procedure: str) -> None:
    """The specimen was never measured by this procedure."""
    rows[:] = [row for row in rows if not (row.specimen == f"{specimen:05d}" and row.procedure == procedure)]


def trouble(rows: list[Row]) -> None:
    """What goes wrong in real life, put in by hand."""
    drop(rows, 1017, "Procedure B")  # unpaired: too little serum left
    change(rows, 1042, "Procedure B", exclude="fibrin clot seen in the cup", excluded_by="Validation lead",
           excluded_on="2026-11-09")
    change(rows, 2033, "Procedure C", result="")  # missing: the order was cancelled
    change(rows, 4009, "Procedure A", exclude="haemolysed, index 3+", excluded_by="Duty scientist",
           excluded_on="2026-11-03")
    # the only specimen above 4.8 carries the finding at 6.0
    change(rows, 4031, "Procedure A", result="6.4")
    change(rows, 4031, "Procedure B", result="6.4")
    # a gross outlier: 612 against 248, never explained, so it stays in
    change(rows, 9023, "Procedure A", result="248")
    change(rows, 9023, "Procedure B", result="612")


@dataclass(frozen=True, slots=True)
class Group:
    """Reference individuals of one sex for one analyte."""

    analyte: str
    sex: str
    n: int
    decimals: int
    truth: Truth
    below: float | None = None


GROUPS = (
    Group("Creatinine", "F", 128, 0, bell(65, 9.5, 30, 120)),
    Group("Creatinine", "M", 124, 0, bell(80, 11, 40, 140)),
    Group("Ferritin", "F", 122, 1, log_normal(46, 0.75, 3, 400)),
    Group("Ferritin", "M", 135, 1, log_normal(120, 0.62, 8, 700)),
    # fewer than 120 of each: the rank method gives way to the robust one
    Group("ALT", "F", 62, 0, log_normal(17, 0.33, 5, 60)),
    Group("ALT", "M", 58, 0, log_normal(24, 0.38, 6, 90)),
    # 15 only: no limits are computed
    Group("Cortisol", "F", 8, 0, log_normal(330, 0.3, 120, 800)),
    Group("Cortisol", "M", 7, 0, log_normal(330, 0.3, 120, 800)),
    # an upper limit only (99th percentile)
    Group("Troponin", "F", 165, 1, log_normal(4.4, 0.5, 0.5, 60), below=2.0),
    Group("Troponin", "M", 160, 1, log_normal(5.2, 0.5, 0.5, 60), below=2.0),
)


def recruit(group: Group, first: int, rng: np.random.Generator) -> list[Person]:
    """Measure every reference individual once."""
    ages = rng.integers(19, 76, group.n)
    return [
        Person(group.analyte, f"R{first + i:05d}", group.sex, int(ages[i]),
               f"<{group.below:g}" if group.below is not None and value < group.below
               else f"{value:.{group.decimals}f}")
        for i, value in enumerate(group.truth(rng, group.n))
    ]


def streams(count: int, salt: int) -> list[np.random.Generator]:
    """One independent stream a study, so that changing one leaves the others alone."""
    return [np.random.default_rng([SEED, salt, i]) for i in range(count)]


def write(path: Path, header: Sequence[str], lines: Sequence[Sequence[str]], delimiter: str = ",") -> None:
    with path.open("w", encoding="utf-8", newline="") as handle:
        writer = csv.writer(handle, delimiter=delimiter, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(lines)


def make(folder: Path) -> None:
    """Write the tables of the round into ``folder``."""
    rows = [row for study, rng in zip(COMPARISONS, streams(len(COMPARISONS), 1), strict=True)
            for row in compare(study, rng)]
    trouble(rows)
    write(folder / "comparison.csv",
          ["analyte", "specimen", "procedure", "replicate", "result", "day", "subject", *EXCLUSION],
          [[r.analyte, r.specimen, r.procedure, str(r.replicate), r.result, r.day, r.subject, r.exclude, r.excluded_by,
            r.excluded_on] for r in rows])

    wide: dict[str, list[str]] = {}
    for row in compare(UREA, streams(1, 2)[0]):
        wide.setdefault(row.specimen, [row.specimen, row.day]).append(row.result.replace(".", ","))
    write(folder / "urea_export.csv", ["Sample no.", "Day", "Procedure A", "Procedure B"], list(wide.values()), ";")

    people: list[Person] = []
    for group, rng in zip(GROUPS, streams(len(GROUPS), 3), strict=True):
        people += recruit(group, 101 + len(people), rng)
    # asked for and documented before the measurement, found out after it
    people[5] = replace(people[5], exclude="takes creatine", excluded_by="Validation lead",
                        excluded_on="2026-11-12")
    people[140] = replace(people[140], result="")
    write(folder / "reference.csv", ["analyte", "subject", "sex", "age", "result", *EXCLUSION],
          [[p.analyte, p.subject, p.sex, str(p.age), p.result, p.exclude, p.excluded_by, p.excluded_on]
           for p in people])


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent / "chemistry_q4")
