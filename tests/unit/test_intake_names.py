"""What the names of nodes show of spreadsheets and slips."""

from __future__ import annotations

import pytest

from analysis.intake import parse_network
from analysis.intake.names import EXAMPLES, damaged, name_warnings

# Ziemann, Eren & El-Osta 2016; Abeysooriya et al. 2021: dates, localised months, day numbers, floats.
DAMAGED = [
    *("2-Sep", "1-Mar", "1-Dec", "02-Sep", "2-Sep-20", "Sep-02", "Mar-01", "9/2/2020", "9/2/20", "2006/09/02"),
    *("2020-09-02", "2020-09-02 00:00:00", "2020-09-02T00:00:00", "1-Mrz", "1-Dez", "2.Sep", "1-déc", "02.09.2020"),
    *("42615", "38961", "46000", "2.31E+13", "2,31E+13", "2E+13", "2.31e+13"),
]

SOUND = [
    *("OCT1", "MAY24", "SEPT2", "SEP15", "SEPT9", "MARCH1", "MARC1", "DEC1", "ADE5,7", "ARG5,6", "AAP1'"),
    *("2310009E13Rik", "2310009E13", "sep-1", "mec-4", "dec-1", "9E10", "HLA-A", "NKX2-5", "38960", "46001", "7157"),
    *("32-Sep", "0-Mar", "13/32/2020", "2020-13-13", "YAL001C", "P53-MAR", "1.1.1.1", "H2-K1", "1-Acyl"),
]


@pytest.mark.parametrize("name", DAMAGED)
def test_names_that_spreadsheets_damaged(name):
    assert damaged([name, "tor1", "ar1"]) == [name]


@pytest.mark.parametrize("name", SOUND)
def test_sound_names(name):
    assert damaged([name, "tor1", "ar1"]) == []


def test_numbers_among_numbers_are_names():
    assert damaged(["42615", "42616", "672"]) == []


def test_the_report_counts_and_shows_some():
    rows = "".join(f"{day}-Sep\ttor{day}\n" for day in range(1, 9))
    report = parse_network(rows.encode(), "x.tsv").report
    warning = next(warning for warning in report.warnings if warning["kind"] == "spreadsheet_damage")
    assert warning["count"] == 8
    assert len(warning["examples"]) == EXAMPLES
    assert any("'1-Sep'" in sentence and "3 more" in sentence for sentence in report.sentences())


def test_names_that_differ_by_case():
    assert name_warnings(["Tor1", "tor1", "TOR1", "ar1"]) == [
        {"kind": "case_differences", "count": 1, "examples": [["TOR1", "Tor1", "tor1"]]}
    ]


def test_placeholders_and_invisible_characters():
    found = {warning["kind"]: warning["examples"] for warning in name_warnings(["NA", "-", "a\u200b", "b\xa0c", "β"])}
    assert found == {"placeholder_names": ["NA", "-"], "invisible_characters": ["a\u200b", "b\xa0c"]}


def test_clean_names_give_no_warning():
    assert name_warnings(["tor1", "ar1", "β-cat", "heat shock"]) == []
