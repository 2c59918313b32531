"""What the README and the CI run promise is what is there."""

from __future__ import annotations

import os
import re
from pathlib import Path

import click
import pytest

import labstat
from labstat.cli import cli

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
CI_RUN = (ROOT / ".ci" / "run").read_text(encoding="utf-8")


def section(title: str) -> str:
    match = re.search(rf"^## {re.escape(title)}\n(.*?)(?=^## |\Z)", README, re.MULTILINE | re.DOTALL)
    assert match is not None, f"README has no section {title!r}"
    return match.group(1)


def commands(title: str) -> list[str]:
    blocks = re.findall(r"```sh\n(.*?)```", section(title), re.DOTALL)
    return [line.split("  #")[0].strip() for block in blocks for line in block.splitlines() if line.strip()]


def test_the_set_up_takes_two_commands_the_main_job_one_and_the_tests_one() -> None:
    assert commands("Set up") == ["python3 -m venv .venv", '.venv/bin/pip install ".[test]"']
    assert commands("Run") == [".venv/bin/labstat run sample_runs/chemistry_q4"]
    assert commands("Test") == [".venv/bin/pytest"]


def test_ci_runs_the_very_test_command_of_the_readme_on_a_line_of_its_own() -> None:
    (command,) = commands("Test")
    assert CI_RUN.splitlines().count(command) == 1


def test_ci_stops_at_the_first_failure_and_can_be_executed() -> None:
    assert "set -euo pipefail" in CI_RUN.splitlines()
    assert os.access(ROOT / ".ci" / "run", os.X_OK)


@pytest.mark.skipif("LABSTAT_TESTS_USE_THE_WHEEL" not in os.environ, reason="only .ci/run installs the wheel")
def test_in_ci_the_tests_see_the_installed_wheel_and_no_checkout() -> None:
    assert "site-packages" in Path(labstat.__file__).parts
    assert not (ROOT / "labstat").exists()


def test_every_command_of_the_program_stands_in_the_readme_and_no_other() -> None:
    table = set(re.findall(r"^\| `labstat (\w+)", section("Your own round"), re.MULTILINE))
    assert isinstance(cli, click.Group)
    assert table == set(cli.commands)


def test_every_option_of_run_stands_in_the_readme_and_no_other() -> None:
    assert isinstance(cli, click.Group)
    options = {
        name
        for parameter in cli.commands["run"].params
        if isinstance(parameter, click.Option)
        for name in parameter.opts
        if name.startswith("--") and name != "--help"
    }
    row = next(line for line in README.splitlines() if line.startswith("| `labstat run"))
    assert set(re.findall(r"`(--[a-z]+)", row)) == options


def test_the_readme_says_what_each_exit_status_means() -> None:
    assert re.findall(r"^\| (\d) \|", section("Your own round"), re.MULTILINE) == ["0", "1", "2"]


def test_the_python_example_of_the_readme_runs_as_it_stands() -> None:
    (example,) = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
    x = [52.0, 61, 70, 84, 95, 110, 135, 160, 190, 230, 270, 310]
    names: dict[str, object] = {"x": x, "y": [1.02 * value + (-1) ** i for i, value in enumerate(x)]}
    names["values"] = [40 + 0.25 * i for i in range(130)]
    exec(example, names)
    assert {"labstat", "fit", "limits"} <= set(names)


@pytest.mark.parametrize("words", [
    "Not a medical device", "no substitute for qualified review", "accreditation rules and licensed practice decide",
    "relative to the procedure in use",
])
def test_the_readme_carries_the_cautions_that_must_stand_beside_the_numbers(words: str) -> None:
    assert words.lower() in " ".join(README.replace("\n> ", " ").split()).lower()


@pytest.mark.parametrize("document", ["README.md", "DEVELOPERS.md", "CHANGELOG.md", *(
    f"docs/{path.name}" for path in sorted((ROOT / "docs").glob("*.md"))
)])
def test_no_document_links_to_a_file_that_is_not_there(document: str) -> None:
    text = (ROOT / document).read_text(encoding="utf-8")
    targets = [target.split("#")[0] for target in re.findall(r"\]\(([^)]+)\)", text) if "://" not in target]
    missing = [target for target in targets if target and not (ROOT / document).parent.joinpath(target).exists()]
    assert missing == []


def test_every_release_in_the_changelog_has_the_same_sections_in_the_same_order() -> None:
    text = (ROOT / "CHANGELOG.md").read_text(encoding="utf-8")
    releases = re.split(r"^## ", text, flags=re.MULTILINE)[1:]
    assert releases
    for release in releases:
        assert re.findall(r"^### (.+)$", release, re.MULTILINE) == ["Added", "Changed", "Fixed", "Numbers that change"]
