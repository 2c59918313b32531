"""The layout holds: data flows one way, the sciences know neither files nor pages nor each other."""

from __future__ import annotations

import ast
import re
from pathlib import Path

import pytest

import labstat

PACKAGE = Path(labstat.__file__).parent
MODULES = {
    ".".join(("labstat", *path.relative_to(PACKAGE).with_suffix("").parts)).removesuffix(".__init__"): path
    for path in sorted(PACKAGE.rglob("*.py"))
}

ROOMS = {
    "resample": {"resample"},
    "comparison": {"comparison", "resample"},
    "reference": {"reference", "resample"},
    "precision": {"precision", "resample"},
    "round": {"round"},
    "study": {"study", "comparison", "reference", "precision", "resample", "round"},
    "judgement": {"judgement", "study", "comparison", "reference", "precision", "resample", "round"},
    "report": {"report", "judgement", "study", "comparison", "reference", "precision", "resample", "round"},
    "record": {"record", "report", "judgement", "study", "comparison", "reference", "precision", "resample", "round"},
}
"""Which rooms a room may import from, beside what all share. The rooms not named here (the batch, the commands) stand
at the right end and may import from everywhere."""


SHARED = {"errors", "checking"}
"""The only modules that every room may use."""


def room(module: str) -> str:
    """The room of a module: the name behind ``labstat``."""
    parts = module.split(".")
    return parts[1] if len(parts) > 1 and not parts[1].startswith("__") else parts[-1]


def imports(path: Path) -> set[str]:
    """Every module that a file imports when it runs (what only a type checker sees does not count)."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    skipped = {
        id(inner)
        for node in ast.walk(tree)
        if isinstance(node, ast.If) and isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING"
        for inner in ast.walk(node)
    }
    found: set[str] = set()
    for node in ast.walk(tree):
        if id(node) in skipped:
            continue
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: imports are absolute"
            found.add(node.module or "")
            found |= {f"{node.module}.{alias.name}" for alias in node.names if f"{node.module}.{alias.name}" in MODULES}
    return found


@pytest.mark.parametrize("module", MODULES)
def test_nothing_on_the_left_imports_from_the_right(module):
    here = room(module)
    if here not in ROOMS:
        return
    ours = {name for name in imports(MODULES[module]) if name == "labstat" or name.startswith("labstat.")}
    wrong = {name for name in ours if room(name) not in {*ROOMS[here], *SHARED}}
    assert wrong == set()


def test_the_rooms_are_those_of_the_table():
    """A new room on the left must be entered above, or nothing would hold it."""
    folders = {room(module) for module, path in MODULES.items() if path.name == "__init__.py" and module != "labstat"}
    assert folders <= {*ROOMS, "batch"}


FILES_AND_PAGES = {
    "csv",
    "io",
    "json",
    "os",
    "pathlib",
    "shutil",
    "sys",
    "tempfile",
    "tomllib",
    "openpyxl",
    "reportlab",
    "click",
    "rich",
    "pydantic",
}


@pytest.mark.parametrize("module", [m for m in MODULES if room(m) in {"comparison", "reference", "precision", "study"}])
def test_the_sciences_do_not_know_files_or_pages(module):
    used = {name.split(".")[0] for name in imports(MODULES[module])}
    assert used & FILES_AND_PAGES == set()
    assert not re.search(r"\b(open|print)\(", MODULES[module].read_text(encoding="utf-8"))


@pytest.mark.parametrize("module", [m for m in MODULES if room(m) == "resample"])
def test_the_core_has_no_clinical_word(module):
    text = MODULES[module].read_text(encoding="utf-8").casefold()
    words = (
        "specimen",
        "analyte",
        "patient",
        "clinic",
        "laborator",
        "candidate",
        "comparative",
        "subject",
        "procedure",
        "reagent",
        "allowance",
        "decision level",
        "healthy",
        "disease",
        "director",
    )
    assert [word for word in words if word in text] == []


@pytest.mark.parametrize("module", [m for m in MODULES if room(m) == "judgement"])
def test_the_judgement_has_no_arithmetic_library_of_its_own(module):
    used = {name.split(".")[0] for name in imports(MODULES[module])}
    assert used & {"numpy", "scipy", "pandas", "statsmodels"} == set()


@pytest.mark.parametrize("module", [m for m in MODULES if room(m) != "report"])
def test_only_the_report_draws(module):
    assert "reportlab" not in {name.split(".")[0] for name in imports(MODULES[module])}


@pytest.mark.parametrize("module", MODULES)
def test_a_module_stays_short(module):
    assert len(MODULES[module].read_text(encoding="utf-8").splitlines()) <= 400
