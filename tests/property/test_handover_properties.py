"""Whatever the names: tables read back, pages stay whole, zips and recipes keep what they are given."""

from __future__ import annotations

import csv
import io
import xml.etree.ElementTree as ET

import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import InputError
from analysis.handover.csv_table import FORMULA_STARTS, csv_bytes, guarded, unguarded
from analysis.handover.graph_file import xml_names
from analysis.handover.recipe import read_recipe
from analysis.handover.report.markup import tag

ANY_TEXT = st.text(st.characters(exclude_categories=["Cs"]), max_size=30)
NEAR_FORMULAS = st.text("=+-@'\t a1", max_size=6)


@given(ANY_TEXT | NEAR_FORMULAS)
def test_guarding_can_be_undone_and_leaves_no_formula(text):
    cell = guarded(text)
    assert unguarded(cell) == text
    assert not cell.lstrip(" ").startswith(FORMULA_STARTS)


@given(st.lists(st.tuples(ANY_TEXT.filter(bool) | NEAR_FORMULAS.filter(bool), st.floats(allow_nan=False)), min_size=1))
def test_tables_read_back(rows):
    table = pd.DataFrame({"gene": pd.Series([name for name, _ in rows], dtype=object), "z": [z for _, z in rows]})
    text = csv_bytes(table).decode()
    read = list(csv.reader(io.StringIO(text, newline="")))[1:]
    assert [(unguarded(name), float(z)) for name, z in read] == rows


@given(ANY_TEXT)
def test_no_text_breaks_out_of_its_element(text):
    element = ET.fromstring(tag("p", text, title=text))  # noqa: S314 - our own markup
    assert list(element) == []
    assert set(element.attrib) == {"title"}


@given(st.sets(st.text("a\x00\x01\x02\ufffd", min_size=1, max_size=4), max_size=12))
def test_names_for_xml_stay_apart(names):
    ordered = tuple(sorted(names))
    legal = xml_names(ordered)
    assert len(set(legal)) == len(ordered)
    assert not any("\x00" in name or "\x01" in name or "\x02" in name for name in legal)


@given(st.text(max_size=200))
def test_any_text_is_a_recipe_or_an_input_error(text):
    with pytest.raises(InputError):
        read_recipe(text)
