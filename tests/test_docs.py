"""The documents name every code and key that the program has, and none that it has not."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest
from pydantic import BaseModel
from pydantic_core import PydanticUndefined

from labstat.judgement.rules_analyte import ANALYTE_RULES
from labstat.judgement.rules_comparison import COMPARISON_RULES
from labstat.judgement.rules_level import LEVEL_RULES
from labstat.judgement.rules_reference import GROUP_RULES
from labstat.round import plan_tables, schema
from labstat.round import rows as tables

DOCS = Path(__file__).resolve().parents[1] / "docs"


def rows(document: str) -> list[list[str]]:
    """The cells of every table row whose first cell is a word in code letters."""
    text = (DOCS / document).read_text(encoding="utf-8")
    return [
        [cell.strip() for cell in line.strip("|").split(" | ")]
        for line in text.splitlines() if line.startswith("| `")
    ]


def test_the_page_of_cautions_lists_every_code_with_its_weights_and_no_other() -> None:
    rules = [*ANALYTE_RULES, *COMPARISON_RULES, *LEVEL_RULES, *GROUP_RULES]
    expected = {(rule.code, rule.weight) for rule in rules}
    # two codes come from parts of a study that do not exist, not from a table of rules
    for code in ("not-computed", "reference-not-computed"):
        expected |= {(code, "stop"), (code, "caution")}
    listed = {
        (cells[0].strip("` "), weight)
        for cells in rows("cautions.md") if len(cells) == 3
        for weight in re.findall(r"`(\w+)`", cells[1])
    }
    assert listed == expected


ESTIMATE = "An estimate"
SAMPLES = DOCS.parent / "sample_runs"


def documented_results() -> tuple[set[str], set[str]]:
    """Every path of results.json that the page names, and the keys of an estimate."""
    text = (DOCS / "results.md").read_text(encoding="utf-8")
    paths: set[str] = set()
    estimate: set[str] = set()
    for part in re.split(r"^#+ ", text, flags=re.MULTILINE):
        title, _, body = part.partition("\n")
        keys = {
            key
            for line in body.splitlines() if line.startswith("| `")
            for key in re.findall(r"`([a-z0-9_]+)`", line.split(" | ")[0])
        }
        if title == ESTIMATE:
            estimate |= keys
        elif title == "Top":
            paths |= keys
        else:
            paths |= {f"{place}.{key}" for place in re.findall(r"`([a-z_.\[\]]+)`", title) for key in keys}
    return paths, estimate


def walk(value: object, place: str, paths: set[str], estimate: set[str]) -> None:
    """Collect every path below ``value``; objects whose keys are the user's own or library names are not entered."""
    if isinstance(value, list):
        for item in value:
            walk(item, f"{place}[]", paths, estimate)
    elif isinstance(value, dict):
        if {"estimate", "interval", "level"} <= set(value):
            estimate |= set(value)
            return
        if place.rsplit(".", 1)[-1] in ("program", "partition", "where"):
            return
        for key, item in value.items():
            path = f"{place}.{key}".lstrip(".")
            paths.add(path)
            walk(item, path, paths, estimate)


def test_the_page_of_results_lists_every_key_that_the_sample_rounds_have_and_no_other() -> None:
    found: set[str] = set()
    found_estimate: set[str] = set()
    for name in ("chemistry_q4", "open_data"):
        text = (SAMPLES / name / "out" / "results.json").read_text(encoding="utf-8")
        walk(json.loads(text), "", found, found_estimate)
    paths, estimate = documented_results()
    where_rows_are = {f"analytes[].rows.{study}" for study in ("comparison", "reference", "precision")}
    assert found - paths - where_rows_are == set()
    # what no sample round has: parts that could not be computed, and rows of an unusable analyte
    rare = {path for path in paths if path.startswith("analytes[].not_computed[].")}
    assert paths - found - rare == set()
    assert found_estimate <= estimate
    assert estimate - found_estimate <= {"replaced", "reason", "rank_attained"}


PLAN_SECTIONS: dict[str, type[BaseModel]] = {
    "`[round]`": schema.RoundKeys,
    "`approved`": schema.ApprovalKeys,
    "`[files]`": schema.FilesKeys,
    "A file": schema.FileKeys,
    "`[defaults]`": schema.DefaultsKeys,
    "`[[analyte]]`": schema.AnalyteKeys,
    "`[analyte.comparison]`": schema.ComparisonKeys,
    "`levels`": schema.LevelKeys,
    "`[analyte.reference]`": schema.ReferenceKeys,
    "`[[analyte.elsewhere]]`": schema.ElsewhereKeys,
}


def plan_page() -> dict[str, list[list[str]]]:
    """Table rows of the page of the plan, by the heading above them."""
    text = (DOCS / "plan.md").read_text(encoding="utf-8")
    found: dict[str, list[list[str]]] = {}
    for part in re.split(r"^#+ ", text, flags=re.MULTILINE):
        title, _, body = part.partition("\n")
        found[title] = [
            [cell.strip() for cell in line[1:].rstrip("|").split(" | ")]
            for line in body.splitlines() if line.startswith("| `")
        ]
    return found


def written(model: type[BaseModel], name: str) -> str:
    """A default as the page writes it."""
    default = model.model_fields[name].default
    if default is PydanticUndefined:
        return "required"
    return "none" if default is None else f"`{json.dumps(default)}`"


@pytest.mark.parametrize("title", PLAN_SECTIONS)
def test_the_page_of_the_plan_lists_every_key_with_its_default_and_no_other(title: str) -> None:
    model = PLAN_SECTIONS[title]
    listed = [(cells[0].strip("`"), cells[2]) for cells in plan_page()[title]]
    assert listed == [(name, written(model, name)) for name in model.model_fields]


def test_the_page_of_the_plan_has_a_section_for_every_model_of_the_plan() -> None:
    models = {
        model for model in vars(schema).values()
        if isinstance(model, type) and issubclass(model, schema.Strict)
    }
    assert models - {schema.Strict, schema.PlanKeys} == set(PLAN_SECTIONS.values())


def test_the_page_of_the_plan_lists_every_column_of_every_table() -> None:
    kinds = {
        "comparison": tables.COMPARISON, "reference": tables.REFERENCE, "precision": tables.PRECISION,
        "allowances": plan_tables.ALLOWANCES, "analytes": plan_tables.ANALYTES,
    }
    listed = {
        cells[0].strip("`"): tuple(tuple(re.findall(r"`(\w+)`", cell)) for cell in cells[1:])
        for cells in plan_page()["The tables"]
    }
    assert listed == {name: (columns.required, columns.optional) for name, columns in kinds.items()}
