"""CSV tables and gene lists: numbers and names read back as they were."""

from __future__ import annotations

import csv
import io
import math

import numpy as np
import pandas as pd
import pytest

from analysis.handover import bundle_files
from analysis.handover.csv_table import csv_bytes, guarded, unguarded
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS
from tests.handover import NASTY, bundle_of, karate_text

# Names of the columns are the contract of the command line.
MEMBERSHIP_HEADER = "gene,module,confidence,second_module,second_confidence,degree,within_module_z,participation,role"
MODULES_HEADER = (
    "module,name,size,internal_edges,cut_edges,internal_density,conductance,resolution_from,resolution_to,stability,"
    "evidence,support,p_value,q_value,below_resolution_limit"
)


@pytest.fixture(scope="module")
def nasty() -> dict[str, bytes]:
    return bundle_files(bundle_of(NASTY))


@pytest.fixture(scope="module")
def karate() -> dict[str, bytes]:
    return bundle_files(bundle_of(karate_text(), "karate.txt", names={"M1": "=the first"}))


def test_headers_are_those_of_the_contract(karate):
    assert karate["membership.csv"].decode().split("\n", 1)[0] == MEMBERSHIP_HEADER == ",".join(MEMBERSHIP_COLUMNS)
    assert karate["modules.csv"].decode().split("\n", 1)[0] == MODULES_HEADER == ",".join(MODULE_COLUMNS)


def test_lines_end_with_a_bare_line_feed(karate):
    assert b"\r" not in karate["membership.csv"]
    assert karate["membership.csv"].endswith(b"\n")


def test_every_figure_reads_back_exactly():
    bundle = bundle_of(karate_text())
    files = bundle_files(bundle)
    for name, table in (("membership.csv", bundle.study.membership), ("modules.csv", bundle.study.module_table)):
        rows = list(csv.DictReader(io.StringIO(files[name].decode())))
        for column in table.select_dtypes("number").columns:
            read = [float(row[column] or "nan") for row in rows]
            assert np.array_equal(read, table[column].to_numpy(np.float64), equal_nan=True), column


def test_flags_are_words_and_counts_are_whole_numbers(karate):
    rows = list(csv.DictReader(io.StringIO(karate["modules.csv"].decode())))
    assert {row["below_resolution_limit"] for row in rows} <= {"true", "false"}
    assert all(row[count].isdecimal() for row in rows for count in ("size", "internal_edges", "cut_edges"))
    assert all(row["p_value"] == "" for row in rows)


def test_dates_and_numbers_among_symbols_stay_as_they_are(nasty):
    genes = pd.read_csv(io.BytesIO(nasty["membership.csv"]))["gene"].tolist()
    assert {"SEPT2", "1-Mar", "2310009E13", "ADE5,7", "&amp;"} <= set(genes)


def test_no_text_cell_begins_like_a_formula(nasty, karate):
    for name in ("membership.csv", "modules.csv"):
        for files in (nasty, karate):
            for row in csv.DictReader(io.StringIO(files[name].decode())):
                texts = [row[column] for column in ("gene", "module", "name", "second_module", "role") if column in row]
                assert not any(text.startswith(("=", "+", "-", "@")) for text in texts)


def test_guarded_names_come_back(nasty):
    rows = csv.DictReader(io.StringIO(nasty["membership.csv"].decode()))
    genes = sorted(unguarded(row["gene"]) for row in rows)
    assert genes == nasty["gene_lists/background.txt"].decode().splitlines()
    assert {"=cmd|' /C calc'!A0", "+1", "'+1", "-3", "@S"} <= set(genes)


@pytest.mark.parametrize("text", ["=1+1", "+x", "-x", "@x", "\tx", "\rx", " =x", "'=x", "''=x", "＝x"])
def test_a_formula_gets_an_apostrophe_and_loses_it_again(text):
    assert guarded(text) == f"'{text}"
    assert unguarded(guarded(text)) == text


@pytest.mark.parametrize("text", ["", "TOR1", "1-Mar", "AAP1'", "5'-end", "'quoted'", "a=b"])
def test_other_text_is_left_alone(text):
    assert guarded(text) == text
    assert unguarded(text) == text


def test_negative_numbers_are_no_formulas():
    table = pd.DataFrame({"z": [-0.1, math.inf, math.nan], "n": [-1, 0, 1]})
    assert csv_bytes(table) == b"z,n\n-0.1,-1\ninf,0\n,1\n"


def test_cells_are_quoted_where_needed():
    table = pd.DataFrame({"gene": ["a,b", 'say "x"', "two\nlines", " blank", None]})
    read = list(csv.reader(io.StringIO(csv_bytes(table).decode(), newline="")))
    assert read[1:5] == [["a,b"], ['say "x"'], ["two\nlines"], [" blank"]]


def test_each_module_has_its_list_and_the_background_is_the_whole_network():
    bundle = bundle_of(karate_text(), method="clique-percolation", k=3)
    files = bundle_files(bundle)
    lists = {name: set(content.decode().split()) for name, content in files.items() if name.startswith("gene_lists/M")}
    names = bundle.study.network.names
    expected = {
        f"gene_lists/M{number}.txt": {names[node] for node in members}
        for number, members in enumerate(bundle.study.modules.members, start=1)
    }
    assert lists == expected
    assert files["gene_lists/background.txt"].decode().split("\n")[:-1] == list(names)
