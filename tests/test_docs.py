"""The documents name every code and key that the program has, and none that it has not."""

from __future__ import annotations

import re
from pathlib import Path

from labstat.judgement.rules_analyte import ANALYTE_RULES
from labstat.judgement.rules_comparison import COMPARISON_RULES
from labstat.judgement.rules_level import LEVEL_RULES
from labstat.judgement.rules_reference import GROUP_RULES

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
