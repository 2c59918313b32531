"""Report file names are safe on every system, whatever an analyte is called."""

from __future__ import annotations

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from labstat.batch.names import report_names


@pytest.mark.parametrize("name", ["Creatinine", "γ-GT", "Hb A1c", "Natrium 140 mmol", "α₁-antitrypsin"])
def test_an_ordinary_name_is_kept(name):
    assert report_names([name]) == {name: f"{unicodedata.normalize('NFC', name)}.pdf"}


@pytest.mark.parametrize(
    "name",
    [
        "../../x",
        "/etc/passwd",
        "CON",
        "con.txt",
        "nul",
        "COM1",
        "a/b",
        "a\\b",
        "",
        "   ",
        ".",
        "..",
        ".hidden",
        "x" * 5000,
        "µ" * 300,
        "a:b*c?d",
        "tab\there",
        "line\nbreak",
        "\u202egnp",
        "trailing. ",
        "\ud800",
        "100 %",
        "<Na>|K",
    ],
)
def test_a_hostile_name_becomes_one_plain_file_name(name):
    file = report_names([name])[name]
    stem = file.removesuffix(".pdf")
    assert file.endswith(".pdf")
    assert 0 < len(stem.encode()) <= 120
    assert not set(stem) & set('<>:"/\\|?*%')
    assert all(unicodedata.category(c)[0] != "C" for c in stem)
    assert stem[0] not in ". "
    assert stem[-1] not in ". "
    assert stem.split(".")[0].casefold() not in {"con", "prn", "aux", "nul", "com1"}


def test_names_that_differ_in_case_or_become_alike_get_files_of_their_own():
    names = ["Na", "NA", "a/b", "a:b", "K"]
    files = report_names(names)
    assert len({file.casefold() for file in files.values()}) == len(names)
    assert files["K"] == "K.pdf"


@given(st.lists(st.text(max_size=12), unique=True, max_size=12), st.randoms(use_true_random=False))
def test_files_are_distinct_for_any_names_and_do_not_depend_on_their_order(names, random):
    files = report_names(names)
    assert len({unicodedata.normalize("NFKC", f.casefold()) for f in files.values()}) == len(names)
    shuffled = list(names)
    random.shuffle(shuffled)
    assert report_names(shuffled) == files
