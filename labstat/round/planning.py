"""``round.toml`` to a plan: read, checked, completed from the defaults and tables, every problem named at once."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from pydantic import ValidationError

from labstat.errors import ArgumentError
from labstat.round import schema
from labstat.round.allowance import Allowance, parse_allowance
from labstat.round.collecting import Problems
from labstat.round.criteria import criteria_hash
from labstat.round.locate import Path, line_of
from labstat.round.mending import fitting, mended
from labstat.round.model import (
    Adopted,
    AnalytePlan,
    Approval,
    ComparisonPlan,
    Elsewhere,
    Level,
    ReferencePlan,
    RoundPlan,
)
from labstat.round.naming import clean_name, did_you_mean
from labstat.round.plan_words import in_words, key_words, value_of

PLAN = "round.toml"


@dataclass(frozen=True, slots=True)
class Origin:
    """Where an analyte or a level was said: the plan, or a line of a table."""

    file: str
    line: int | None


@dataclass(frozen=True, slots=True)
class ReadPlan:
    """The plan with what only reading the tables needs. ``unsound``: analytes with procedures wrongly named."""

    plan: RoundPlan
    files: schema.FilesKeys
    ignored_procedures: Mapping[str, tuple[str, ...]]
    unsound: frozenset[str]


def parse_toml(text: str, problems: Problems) -> dict[str, Any] | None:
    """The raw plan; ``None`` with a problem when it is no TOML."""
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        message = str(error)
        line = None
        if "(at line " in message:
            line = int(message.split("(at line ", 1)[1].split(",", 1)[0])
            message = message.split(" (at line", 1)[0]
        problems.add(PLAN, line, None, None, f"is not well-formed TOML ({message})", "correct the line")
        return None


def checked_defaults(raw: dict[str, Any], text: str, problems: Problems) -> dict[str, Any]:
    """The raw plan with the wrong keys of ``[defaults]`` told once and taken out, before analytes inherit them."""
    defaults = raw.get("defaults")
    if not isinstance(defaults, dict):
        return raw
    checked = dict(defaults)
    for study, model, needed in (
        ("comparison", schema.ComparisonKeys, {"comparative": "x", "candidate": "y"}),
        ("reference", schema.ReferenceKeys, {}),
    ):
        own = defaults.get(study)
        if not isinstance(own, dict):
            continue
        try:
            model.model_validate({**needed, **own})
        except ValidationError as error:
            told: set[tuple[Path, str]] = set()
            for path, item in fitting(error, own):
                whole: Path = ("defaults", study, *path)
                what, remedy = in_words(whole, item)
                if (whole, what) not in told:
                    told.add((whole, what))
                    problems.add(PLAN, line_of(text, whole), key_words(whole), value_of(item), what, remedy)
            wrong = {path[2] for path, _ in told}
            checked[study] = {key: value for key, value in own.items() if key not in wrong}
    return {**raw, "defaults": checked}


def completed(raw: dict[str, Any]) -> dict[str, Any]:
    """Analytes with what they inherit from ``[defaults]``.

    A default belongs to every analyte with such a section, and makes one where an analyte has no section at all.
    """
    defaults = raw.get("defaults", {})
    analytes = raw.get("analyte", [])
    if not isinstance(defaults, dict) or not isinstance(analytes, list):
        return raw
    made = []
    for analyte in analytes:
        if not isinstance(analyte, dict):
            made.append(analyte)
            continue
        bare = "comparison" not in analyte and "reference" not in analyte
        full = dict(analyte)
        for study in ("comparison", "reference"):
            inherited = defaults.get(study)
            own = analyte.get(study)
            if isinstance(inherited, dict) and inherited and (bare or isinstance(own, dict)):
                full[study] = {**inherited, **(own or {})}
        made.append(full)
    return {**raw, "analyte": made}


def validated(raw: dict[str, Any], text: str, problems: Problems) -> tuple[schema.PlanKeys, frozenset[str]] | None:
    """The plan's keys and types; every error becomes a problem.

    What is wrong is left out or stood in for, so that the tables can be read too and all be told at once. The names
    are those of the analytes that were changed by this: nothing should be said of their rows.
    """
    try:
        return schema.PlanKeys.model_validate(raw), frozenset()
    except ValidationError as error:
        seen: set[tuple[Path, str]] = set()
        for path, item in fitting(error, raw):
            what, remedy = in_words(path, item)
            if (path, what) not in seen:
                seen.add((path, what))
                problems.add(PLAN, line_of(text, path), key_words(path), value_of(item), what, remedy)
        analytes = raw.get("analyte")
        changed = {path[1] for path, _ in seen if path[0] == "analyte" and len(path) > 1}
        names = [
            analyte.get("name") for index, analyte in enumerate(analytes if isinstance(analytes, list) else [])
            if index in changed and isinstance(analyte, dict)
        ]
        keys = mended(raw)
        return None if keys is None else (keys, frozenset(clean_name(name) for name in names if isinstance(name, str)))


def built(
    keys: schema.PlanKeys, text: str, problems: Problems, levels: Mapping[str, list[tuple[Origin, schema.LevelKeys]]],
    origins: Mapping[str, Origin],
) -> ReadPlan:
    """The plan in the form that everything else works with. ``levels`` come from the allowances table, by analyte."""
    builder = _Builder(text, problems, levels, origins)
    analytes = tuple(builder.analyte(index, analyte) for index, analyte in enumerate(keys.analyte))
    builder.names(keys.analyte)
    if not analytes:
        problems.add(PLAN, None, "analyte", None, "the plan names no analyte", "add at least one [[analyte]]")
    r = keys.round
    approved = r.approved
    plan = RoundPlan(
        title=r.title, laboratory=r.laboratory, prepared_by=r.prepared_by, reviewer=r.reviewer, seed=r.seed,
        resamples=r.resamples, level=r.level, limit_level=r.limit_level, page=r.page,
        issued=None if r.issued is None else str(r.issued), report_number=r.report_number,
        approved=None if approved is None else Approval(approved.by, str(approved.on), approved.criteria),
        deviations=tuple(r.deviations), criteria_hash=criteria_hash(analytes), analytes=analytes,
    )
    ignored = {
        a.name: tuple(clean_name(p) for p in a.comparison.ignore_procedures)
        for a in keys.analyte if a.comparison is not None
    }
    return ReadPlan(plan, keys.files, ignored, frozenset(builder.unsound))


class _Builder:
    """Turns validated keys into plans and notes what no type can say."""

    def __init__(
        self, text: str, problems: Problems, levels: Mapping[str, list[tuple[Origin, schema.LevelKeys]]],
        origins: Mapping[str, Origin],
    ) -> None:
        self.text, self.problems, self.levels, self.origins = text, problems, levels, origins
        self.name = ""
        self.unsound: set[str] = set()

    def note(self, path: Path, value: object, what: str, remedy: str, origin: Origin | None = None) -> None:
        source = origin or self.origins.get(self.name)
        shown = None if value is None else str(value)
        if source is not None and source.file != PLAN:
            self.problems.add(source.file, source.line, str(path[-1]), shown, what, remedy)
        else:
            self.problems.add(PLAN, line_of(self.text, path), key_words(path), shown, what, remedy)

    def names(self, analytes: Iterable[schema.AnalyteKeys]) -> None:
        seen: set[str] = set()
        for index, analyte in enumerate(analytes):
            self.name = name = clean_name(analyte.name)
            if name in seen:
                self.note(("analyte", index, "name"), name, "this analyte is in the plan twice", "merge the two")
            seen.add(name)

    def analyte(self, index: int, keys: schema.AnalyteKeys) -> AnalytePlan:
        path: Path = ("analyte", index)
        self.name = name = clean_name(keys.name)
        if not name:
            self.note((*path, "name"), keys.name, "is blank", "name the analyte")
        interval = None
        if keys.measuring_interval is not None:
            low, high = keys.measuring_interval
            interval = (float(low), float(high))
            if not low < high:
                shown = f"[{low:g}, {high:g}]"
                self.note((*path, "measuring_interval"), shown, "must ascend", "write [lowest, highest]")
        if keys.comparison is None:
            for origin, level in self.levels.get(name, []):
                self.note(
                    (*path, "at"), f"{level.at:g}", f"{name} has a level and no comparison",
                    "add [analyte.comparison], or remove the row", origin,
                )
        if keys.comparison is None and keys.reference is None:
            self.note(path, name, "asks for no study", "add [analyte.comparison] or [analyte.reference]")
        comparison = None if keys.comparison is None else self.comparison((*path, "comparison"), keys.comparison, name)
        reference = None if keys.reference is None else self.reference((*path, "reference"), keys.reference)
        return AnalytePlan(
            name, clean_name(keys.unit), keys.decimals, interval, keys.specimen_type, comparison, reference,
            tuple(Elsewhere(e.item, e.document, e.outcome) for e in keys.elsewhere),
        )

    def comparison(self, path: Path, keys: schema.ComparisonKeys, name: str) -> ComparisonPlan:
        comparative = clean_name(keys.comparative)
        named = [keys.candidate] if isinstance(keys.candidate, str) else keys.candidate
        candidates = tuple(clean_name(candidate) for candidate in named)
        if not candidates:
            self.note((*path, "candidate"), None, "names no procedure", "name at least one candidate")
        if comparative in candidates:
            self.note((*path, "candidate"), comparative, "is the comparative procedure too", "name another candidate")
        if not candidates or comparative in candidates:
            self.unsound.add(name)
        if len(set(candidates)) < len(candidates):
            self.note((*path, "candidate"), ", ".join(candidates), "names a procedure twice", "name each once")
        if isinstance(keys.variance_ratio, str):
            self.note(
                (*path, "variance_ratio"), keys.variance_ratio, "is not available in this version", "give a number"
            )
        if keys.purpose != "new":
            self.note(
                (*path, "purpose"), keys.purpose, "studies of 5 to 20 specimens are not judged by this version",
                'leave purpose out, or set it to "new"',
            )
        if len(set(keys.methods)) < len(keys.methods):
            self.note((*path, "methods"), ", ".join(keys.methods), "names a method twice", "name each once")
        report = keys.report or keys.methods[0]
        methods = tuple(keys.methods) if report in keys.methods else (report, *keys.methods)
        if keys.interval == "rank" and report != "passing-bablok":
            self.note(
                (*path, "interval"), "rank", f"exists for passing-bablok only, and {report} is reported",
                "choose another interval",
            )
        return ComparisonPlan(
            comparative, candidates, methods, report, keys.interval,
            1.0 if isinstance(keys.variance_ratio, str) else float(keys.variance_ratio),
            self.all_levels(path, keys, name), keys.difference, keys.minimum_n, keys.recommended_n,
        )

    def all_levels(self, path: Path, keys: schema.ComparisonKeys, name: str) -> tuple[Level, ...]:
        said: list[tuple[Path, Origin | None, schema.LevelKeys]] = [
            ((*path, "levels", index), None, level) for index, level in enumerate(keys.levels)
        ]
        said += [(("at",), origin, level) for origin, level in self.levels.get(name, [])]
        made: dict[float, Level] = {}
        for where, origin, level in said:
            at = float(level.at)
            if at in made:
                self.note((*where, "at"), f"{at:g}", "this level is given twice", "give each level once", origin)
            made[at] = Level(
                at, self.allowance(where, "allowable", level.allowable, origin),
                self.allowance(where, "total_error", level.total_error, origin), level.source,
            )
            if (level.allowable or level.total_error) and not (level.source or "").strip():
                self.note(
                    (*where, "source"), None, f"the allowance at {level.at:g} names no source",
                    'add source = "…": the report prints it', origin,
                )
        return tuple(made[at] for at in sorted(made))

    def allowance(self, where: Path, key: str, text: str | None, origin: Origin | None) -> Allowance | None:
        if text is None:
            return None
        try:
            return parse_allowance(text)
        except ArgumentError as error:
            self.note((*where, key), text, f"is no allowance: it {error.rule}", "correct it", origin)
            return None

    def reference(self, path: Path, keys: schema.ReferenceKeys) -> ReferencePlan:
        if len(keys.limits) == 2 and not keys.limits[0] < keys.limits[1]:
            self.note((*path, "limits"), keys.limits, "must ascend", "write the lower probability first")
        if keys.method == "transformed":
            self.note((*path, "method"), "transformed", "is not available in this version", "use auto, rank or robust")
        if keys.method == "robust" and keys.interval == "rank":
            self.note((*path, "interval"), "rank", "exists for method rank only", "use percentile or bca")
        partition = tuple(clean_name(column) for column in keys.partition)
        if len(set(partition)) < len(partition):
            self.note((*path, "partition"), ", ".join(partition), "names a column twice", "name each once")
        about = {
            key: value for key in ("recruitment", "criteria", "fasting", "posture", "specimen_type")
            if (value := getattr(keys, key)) is not None
        }
        return ReferencePlan(
            tuple(float(p) for p in keys.limits), partition, keys.method, keys.interval,
            self.all_adopted(path, keys, partition), about, keys.minimum_n, keys.recommended_n,
        )

    def all_adopted(
        self, path: Path, keys: schema.ReferenceKeys, partition: tuple[str, ...]
    ) -> tuple[Adopted, ...]:
        made: list[Adopted] = []
        for index, said in enumerate(keys.adopted):
            where: Path = (*path, "adopted", index)
            adopted = self.adopted(where, said, partition)
            if adopted is None:
                continue
            if any(other.where == adopted.where for other in made):
                group = ", ".join(adopted.where.values()) or None
                self.note(where, group, "this group has an adopted interval already", "give each group one")
            made.append(adopted)
        return tuple(made)

    def adopted(self, path: Path, keys: dict[str, Any], partition: tuple[str, ...]) -> Adopted | None:
        limits: dict[str, float | None] = {"low": None, "high": None}
        where: dict[str, str] = {}
        good = True
        for key, value in keys.items():
            if key in limits:
                if isinstance(value, bool) or not isinstance(value, (int, float)):
                    self.note((*path, key), value, "must be a number", "correct it")
                    good = False
                else:
                    limits[key] = float(value)
            elif key in partition:
                where[key] = clean_name(str(value))
            else:
                known = ("low", "high", *partition)
                self.note((*path, key), value, f"is no column of the partition{did_you_mean(key, known)}",
                          f"use {', '.join(known)}")
                good = False
        low, high = limits["low"], limits["high"]
        if low is None and high is None:
            self.note(path, None, "an adopted interval has neither low nor high", "give at least one")
            return None
        if low is not None and high is not None and not low < high:
            self.note(path, f"{low:g} to {high:g}", "must ascend", "write the lower limit as low")
            return None
        return Adopted(where, low, high) if good else None


__all__ = ["PLAN", "Origin", "ReadPlan", "built", "checked_defaults", "completed", "parse_toml", "validated"]
