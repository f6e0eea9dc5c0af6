"""What is handed over beside the files that always are: read back with other programs."""

from __future__ import annotations

import csv
import io
import re
import xml.etree.ElementTree as ET
import zipfile
from importlib.util import find_spec

import numpy as np
import openpyxl
import pandas as pd
import pytest

from analysis.colours import MODULE_COLOURS
from analysis.compute import InProcess
from analysis.compute_local import LocalProcesses
from analysis.errors import SettingError
from analysis.evidence import run_study
from analysis.handover import EXPORTS, EXTRAS, Bundle, bundle_files, check_parts, read_recipe
from analysis.handover.report.bibliography import bibliography
from analysis.handover.report.citations import REFERENCES, cited_keys
from analysis.handover.report.methods_text import methods_sentences
from analysis.handover.report.pdf import Drawing
from analysis.handover.workbook import workbook_bytes
from analysis.intake import parse_network
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS, StudySettings
from app.places import assets_folder
from app.stations.handover import CHOICES
from tests.handover import NASTY, bundle_of, karate_text

WITHOUT_PARQUET = tuple(part for part in EXTRAS if part != "parquet")
# Symbols that spreadsheets take for dates and floats: Ziemann, Eren & El-Osta 2016
SYMBOLS = ["SEPT2", "MARCH1", "1-Dec", "2310009E13", "=1+1", "+x", "@y", "TRUE", "007"]


def _all(text: str = karate_text(), **settings: object) -> tuple[Bundle, dict[str, bytes]]:
    bundle = bundle_of(text, **settings)
    bundle = Bundle(bundle.study, bundle.report, bundle.source, WITHOUT_PARQUET)
    return bundle, bundle_files(bundle)


@pytest.fixture(scope="module")
def karate() -> tuple[Bundle, dict[str, bytes]]:
    return _all(names={"M1": "bilayer repair & <more>"})


@pytest.fixture(scope="module")
def symbols() -> dict[str, bytes]:
    ring = zip(SYMBOLS, [*SYMBOLS[1:], SYMBOLS[0]], strict=True)
    return _all("".join(f"{one}\t{other}\n" for one, other in ring))[1]


def _workbook(files: dict[str, bytes]) -> openpyxl.Workbook:
    return openpyxl.load_workbook(io.BytesIO(files["membership.xlsx"]))


def test_every_choice_has_its_words_on_the_screen():
    assert CHOICES.keys() == EXTRAS.keys()
    assert not EXPORTS.keys() & EXTRAS.keys()


# the workbook, opened with openpyxl


def test_symbols_come_back_as_text(symbols):
    sheet = _workbook(symbols)["membership"]
    cells = [row[0] for row in sheet.iter_rows(min_row=2)]
    assert sorted(cell.value for cell in cells) == sorted(SYMBOLS)
    assert {cell.data_type for cell in cells} <= {"s", "inlineStr"}
    assert {cell.number_format for cell in cells} == {"@"}


def test_the_workbook_has_both_tables_and_every_figure(karate):
    bundle, files = karate
    book = _workbook(files)
    assert book.sheetnames == ["membership", "modules"]
    tables = {"membership": bundle.study.membership, "modules": bundle.study.module_table}
    for name, columns in (("membership", MEMBERSHIP_COLUMNS), ("modules", MODULE_COLUMNS)):
        head, *rows = book[name].iter_rows(values_only=True)
        assert head == columns
        for column in tables[name].select_dtypes("number").columns:
            read = [np.nan if row[columns.index(column)] is None else row[columns.index(column)] for row in rows]
            assert np.array_equal(read, tables[name][column].to_numpy(np.float64), equal_nan=True)
    assert book["modules"]["B2"].value == "bilayer repair & <more>"
    assert {cell.value for cell in book["modules"]["O"][1:]} <= {True, False}


def test_characters_that_xml_forbids_are_replaced_and_all_others_kept():
    table = pd.DataFrame({"gene": ["a b  c ", "x\x01y", "<&>", "two\nlines", "\ttab", "中"], "n": [1, 2, 3, 4, 5, 6]})
    sheet = openpyxl.load_workbook(io.BytesIO(workbook_bytes({"one": table})))["one"]
    read = [row[0] for row in sheet.iter_rows(min_row=2, values_only=True)]
    assert read == ["a b  c ", "x\ufffdy", "<&>", "two\nlines", "\ttab", "中"]


def test_names_of_all_kinds_come_back():
    sheet = _workbook(_all(NASTY)[1])["membership"]
    genes = {row[0] for row in sheet.iter_rows(min_row=2, values_only=True)}
    assert genes == set(bundle_of(NASTY).study.network.names)


def test_the_archive_is_whole_and_knows_no_clock(karate):
    bundle, files = karate
    with zipfile.ZipFile(io.BytesIO(files["membership.xlsx"])) as archive:
        assert archive.testzip() is None
        for name in archive.namelist():
            ET.fromstring(archive.read(name))  # noqa: S314 - our own file
        assert {entry.date_time for entry in archive.infolist()} == {(1980, 1, 1, 0, 0, 0)}
    assert bundle_files(bundle) == files


# other forms of the table


def test_the_table_with_tabs_is_the_same_table(karate):
    _, files = karate
    commas = list(csv.reader(io.StringIO(files["membership.csv"].decode())))
    assert list(csv.reader(io.StringIO(files["membership.tsv"].decode()), delimiter="\t")) == commas


def test_parquet_is_written_or_it_is_said_what_it_needs():
    bundle = bundle_of(karate_text())
    asked = Bundle(bundle.study, bundle.report, bundle.source, ("parquet",))
    if find_spec("pyarrow") is None:
        with pytest.raises(SettingError, match="pip install pyarrow"):
            bundle_files(asked)
    else:
        read = pd.read_parquet(io.BytesIO(bundle_files(asked)["membership.parquet"]))
        assert read["gene"].tolist() == bundle.study.membership["gene"].tolist()


# gene lists


def test_core_lists_hold_the_genes_that_stay_and_the_whole_background(karate):
    bundle, files = karate
    table = bundle.study.membership
    for module in bundle.study.modules.numbers:
        # core: in nine of ten runs or copies, by definition of the product
        expected = table[(table["module"] == module) & (table["confidence"] >= 0.9)]["gene"].tolist()
        assert files[f"gene_lists_core/{module}.txt"].decode().split() == expected
    assert files["gene_lists_core/background.txt"] == files["gene_lists/background.txt"]


def test_set_lines_are_a_set_a_line(karate):
    bundle, files = karate
    lines = [line.split("\t") for line in files["module_sets.tsv"].decode().splitlines()]
    assert [line[0] for line in lines] == bundle.study.modules.numbers
    assert lines[0][1] == "bilayer repair & <more>"
    for module, _, *genes in lines:
        assert genes == files[f"gene_lists/{module}.txt"].decode().split()


def test_core_lists_without_confidence_are_refused_before_the_work():
    with pytest.raises(SettingError, match="--noise"):
        check_parts(["core-lists"], StudySettings(runs=1, noise=0.0))
    check_parts(["core-lists"], StudySettings(runs=2, noise=0.0))
    with pytest.raises(SettingError, match="'picture'"):
        check_parts(["picture"], StudySettings())


# the map and the figures


def test_the_map_stands_alone_and_has_its_legend(karate):
    bundle, files = karate
    tree = ET.fromstring(files["map.svg"])  # noqa: S314 - our own file
    texts = [text.text for text in tree.iter("{http://www.w3.org/2000/svg}text")]
    sizes = bundle.study.modules.sizes.tolist()
    assert f"M1 bilayer repair & … ({sizes[0]} genes)" in texts
    assert sum(text.endswith("genes)") for text in texts) == sum(size >= 5 for size in sizes)
    assert len(list(tree.iter("{http://www.w3.org/2000/svg}circle"))) == 34
    assert not re.search(rb"href|url\((?!#)|<script", files["map.svg"])


def test_the_pdf_says_truly_where_its_parts_are(karate):
    content = karate[1]["map.pdf"]
    start = int(re.search(rb"startxref\n(\d+)\n%%EOF\n$", content)[1])
    assert content[start:].startswith(b"xref\n0 8\n")
    places = [int(place) for place in re.findall(rb"^(\d{10}) 00000 n $", content[start:], re.MULTILINE)]
    for number, place in enumerate(places, start=1):
        assert content[place:].startswith(f"{number} 0 obj\n".encode())
    length = int(re.search(rb"/Length (\d+)", content)[1])
    stream = re.search(rb"stream\n(.*)\nendstream", content, re.DOTALL)[1]
    assert len(stream) == length
    assert len(re.findall(rb" b$", stream, re.MULTILINE)) == 34  # a disc for each gene
    assert stream.count(b" l") >= 78  # a line for each edge


def test_text_in_a_pdf_cannot_end_its_string():
    page = Drawing(100, 100)
    page.text("(x) Tj \\) 中 é", 1, 1, 10)
    assert "<2878 2920546a205c29203f20e9>".replace(" ", "").encode() in page.page("t")


def test_the_numbers_behind_the_figures(karate):
    bundle, files = karate
    places = pd.read_csv(io.BytesIO(files["figure_data/map.csv"]))
    assert places["gene"].tolist() == list(bundle.study.network.names)
    assert np.array_equal(places[["x", "y"]].to_numpy(), bundle.positions)
    confidence = pd.read_csv(io.BytesIO(files["figure_data/confidence.csv"]))
    assert confidence["memberships"].sum() == len(bundle.study.membership)
    sizes = pd.read_csv(io.BytesIO(files["figure_data/sizes.csv"]))
    assert (sizes["genes"] * sizes["modules"]).sum() == 34
    assert "figure_data/null_networks.csv" not in files


def test_screen_and_reports_have_one_palette():
    """The scripts keep a copy, since the browser loads no Python."""
    script = (assets_folder() / "glue.js").read_text(encoding="utf-8")
    palette = re.search(r"palette = \[(.*?)\]", script, re.DOTALL)[1]
    assert tuple(re.findall(r"#[0-9a-f]{6}", palette)) == MODULE_COLOURS


# references


def test_every_reference_can_be_written_as_bibtex():
    text = bibliography(list(REFERENCES))
    assert len(re.findall(r"^@(article|book|misc)\{", text, re.MULTILINE)) == len(REFERENCES) + 1
    assert text.count("{") == text.count("}")
    assert "author = {Traag, V. A. and Waltman, L. and van Eck, N. J.}" in text
    assert "Hu, M.-B." in text
    assert "pages = {814--818}" in text


def test_the_file_holds_what_the_methods_cite(karate):
    bundle, files = karate
    keys = set(re.findall(r"^@\w+\{([a-z]+)", files["references.bib"].decode(), re.MULTILINE))
    assert keys == {*cited_keys(methods_sentences(bundle)), "corymb"}


# repeating


def test_the_recipe_knows_what_was_written_too(karate):
    recipe = read_recipe(karate[1]["recipe.toml"].decode())
    assert recipe.parts == WITHOUT_PARQUET


def test_every_file_is_the_same_from_one_process_and_from_two():
    reading = parse_network(karate_text().encode(), "karate.txt")
    source = bundle_of(karate_text(), "karate.txt", runs=1, noise=0.0).source
    written = []
    for compute in (InProcess(), LocalProcesses(2)):
        study = run_study(reading.network, StudySettings(runs=6, nulls=6), compute=compute)
        written.append(bundle_files(Bundle(study, reading.report, source, WITHOUT_PARQUET)))
        compute.close()
    assert written[0] == written[1]
