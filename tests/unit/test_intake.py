"""Rows to a network: separators, comments, merging, provenance, fingerprint."""

from __future__ import annotations

import gzip
import hashlib
import io
import json
import pickle

import networkx
import numpy as np
import pandas as pd
import pytest

from analysis.errors import Cancelled, InputError
from analysis.intake import FORMATS, IntakeReport, Reading, Rejected, parse_network, read_network
from analysis.intake.lines import BLOCK, blocks


def read(text: str, **options) -> Reading:
    return parse_network(text.encode(), "interactions.tsv", **options)


def edges(reading: Reading) -> dict[tuple[str, str], float]:
    network = reading.network
    ends = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    weights = network.edge_weights.tolist()
    return {(network.names[a], network.names[b]): w for (a, b), w in zip(ends, weights, strict=True)}


def kinds(report: IntakeReport) -> dict[str, dict]:
    return {warning["kind"]: warning for warning in report.warnings}


def law_holds(report: IntakeReport) -> bool:
    left = report.edges + report.self_loops + report.duplicates_merged + len(report.rejected)
    return report.rows == left


WANTED = {("ar1", "tor1"): 0.5, ("cor2", "tor1"): 0.75}


@pytest.mark.parametrize(
    ("text", "separator"),
    [
        ("tor1\tar1\t0.5\ncor2\ttor1\t0.75\n", "tab"),
        ("tor1,ar1,0.5\ncor2,tor1,0.75\n", "comma"),
        ("tor1, ar1, 0.5\ncor2, tor1, 0.75\n", "comma"),
        ("tor1;ar1;0.5\ncor2;tor1;0.75\n", "semicolon"),
        ("tor1;ar1;0,5\ncor2;tor1;0,75\n", "semicolon"),
        ("tor1 ar1 0,5\ncor2 tor1 0,75\n", "blanks"),
        ("tor1 ar1 0.5\ncor2   tor1  0.75\n", "blanks"),
        ("  tor1 ar1 0.5\n  cor2 tor1 0.75  \n", "blanks"),
        ('"tor1","ar1","0.5"\n"cor2","tor1","0.75"\n', "comma"),
        ('"tor1" "ar1" 0.5\n"cor2" "tor1" 0.75\n', "blanks"),
        ("tor1\tar1\t0.5\t\t\ncor2\ttor1\t0.75\t\n", "tab"),
        ("tor1,ar1,0.5,,\ncor2,tor1,0.75,,\n", "comma"),
        ("tor1\tar1\t0.5\tkind one\ncor2\ttor1\t0.75\tkind; two, three\n", "tab"),
        ("tor1\tar1\t0.5\r\ncor2\ttor1\t0.75\r\n", "tab"),
        ("tor1\tar1\t0.5\rcor2\ttor1\t0.75\r", "tab"),
        ("\ufefftor1\tar1\t0.5\ncor2\ttor1\t0.75", "tab"),
        ("sep=;\ntor1;ar1;0.5\ncor2;tor1;0.75\n", "semicolon"),
    ],
)
def test_the_separator_is_found_by_content(text, separator):
    reading = read(text)
    assert reading.report.separator == separator
    assert edges(reading) == WANTED
    assert reading.report.rows == reading.report.edges == 2
    assert not reading.report.rejected


def test_commas_in_names_do_not_part_cells():
    # ADE5,7, ARG5,6 and AAP1' are true yeast names (common practice, no source)
    tabs = read("ADE5,7\tARG5,6\t0.5\nAAP1'\tADE5,7\t0.6\n")
    assert tabs.network.names == ("AAP1'", "ADE5,7", "ARG5,6")
    assert read("ADE5,7 ARG5,6 0.5\nAAP1' ADE5,7 0.6\n").network == tabs.network
    assert read('"ADE5,7","ARG5,6",0.5\nAAP1\',"ADE5,7",0.6\n').network == tabs.network


def test_names_of_several_words_keep_their_blanks():
    assert read("heat shock\tkinase one\nkinase one\tpump\n").network.names == ("heat shock", "kinase one", "pump")
    assert read("heat shock,kinase one,0.5\nkinase one,old pump,1\n").network.edge_count == 2


def test_comments_and_blank_lines_are_no_rows_and_line_numbers_stay_true():
    report = read("# made by hand\n\n% also\n// and\na\tb\t1\n\t\t\n\na\tc\tNA\n#\tx\ty\n").report
    assert (report.comments, report.blank_lines, report.rows) == (4, 3, 2)
    assert report.rejected == (Rejected(8, "weight is missing ('NA')"),)


def test_quoted_cells_may_hold_separators_quotes_and_line_breaks():
    text = 'source,target,note,weight\ntor1,ar1,"two\nlines, ""quoted""",0.5\ncor2,"tor1",x,0.75\na,b,y,NA\n'
    reading = read(text)
    assert edges(reading) == WANTED
    assert reading.report.rejected[0].line == 5


def test_a_quote_that_never_closes_costs_one_row():
    reading = read('"a\tb\t1\n"c"\td\t2\nd\te\t3\n5" tube\te\t4\n')
    assert reading.report.rejected == (Rejected(1, "quotes are opened and not closed"),)
    assert set(edges(reading)) == {("c", "d"), ("d", "e"), ('5" tube', "e")}
    blanks = read('"a b 1\n"c c" d 2\n')
    assert [row.line for row in blanks.report.rejected] == [1]
    assert edges(blanks) == {("c c", "d"): 2}


def test_duplicates_merge_in_either_direction_and_the_largest_weight_stays():
    reading = read("a\tb\t1\nb\ta\t3\na\tb\t2\nc\td\t5\nd\tc\t5\n")
    assert edges(reading) == {("a", "b"): 3, ("c", "d"): 5}
    assert reading.report.duplicates_merged == 3
    assert kinds(reading.report)["duplicate_weights_differ"]["count"] == 1
    assert law_holds(reading.report)


def test_self_loops_are_counted_and_their_nodes_stay():
    reading = read("a\tb\na\ta\nlone\tlone\nlone\tlone\n")
    assert reading.network.names == ("a", "b", "lone")
    assert (reading.report.self_loops, reading.report.edges, reading.report.nodes) == (3, 1, 3)
    assert kinds(reading.report)["isolated_nodes"] == {"kind": "isolated_nodes", "count": 1, "examples": ["lone"]}
    assert law_holds(reading.report)


def test_a_file_of_self_loops_alone_is_a_network_without_edges():
    reading = read("a\ta\t1\nb\tb\t2\n")
    assert (reading.report.edges, reading.report.nodes, reading.report.self_loops) == (0, 2, 2)
    assert reading.report.components == 2
    assert reading.report.weight_range is None
    assert reading.report.sentences()


def test_rejected_rows_leave_no_node_behind():
    reading = read("a\tb\t1\nx\ty\t0\nz\tz\tNA\n")
    assert reading.network.names == ("a", "b")
    assert reading.report.self_loops == 0
    assert law_holds(reading.report)


def test_every_reason_to_reject_a_row_is_told_with_its_line():
    rows = ["a\tb\t1", "b\tc", "\tc\t1", "c\t \t1", "c\td\theavy", "c\td\tNA", "c\td\t", "c\td\t0", "c\td\t-2"]
    rows += ["c\td\tinf", "c\td\t1e999", f"c\t{'x' * 2000}\t1", "c\td\t1_000", "c\td\tnan", "b\ta\t1"]
    report = read("\n".join(rows)).report
    assert {row.line: row.reason for row in report.rejected} == {
        2: "too few columns: 2 columns where 3 are needed",
        3: "empty label in column 1",
        4: "empty label in column 2",
        5: "weight 'heavy' is not a number",
        6: "weight is missing ('NA')",
        7: "weight is missing (empty)",
        8: "weight is zero",
        9: "weight '-2' is negative",
        10: "weight 'inf' is infinite",
        11: "weight '1e999' is infinite",
        12: "label too long: 2,000 characters in column 2",
        13: "weight '1_000' is not a number",
        14: "weight is missing ('nan')",
    }
    assert (report.rows, report.edges, report.duplicates_merged) == (15, 1, 1)
    assert law_holds(report)


def test_a_header_that_stands_inside_joined_files_is_no_row_of_data():
    reading = read("source\ttarget\tweight\na\tb\t1\nsource\ttarget\tweight\nb\tc\t2\n")
    assert reading.report.rejected == (Rejected(3, "the header again"),)
    assert reading.network.names == ("a", "b", "c")


def test_numbers_are_good_names():
    reading = read("7157\t4193\t0.9\n672\t7157\t0.8\n")
    assert reading.network.names == ("4193", "672", "7157")
    assert reading.report.header is None


def test_blanks_around_names_are_trimmed_and_told():
    reading = read(" a\tb \nb\tc\n")
    assert reading.network.names == ("a", "b", "c")
    assert kinds(reading.report)["blanks_trimmed"]["count"] == 2


def test_components_are_counted():
    report = read("a\tb\nb\tc\nd\te\n").report
    assert (report.components, report.giant_component) == (2, 3)
    assert kinds(report)["components"] == {"kind": "components", "count": 2, "giant_component": 3}
    assert "components" not in kinds(read("a\tb\nb\tc\n").report)


def test_the_range_of_weights_is_reported_and_a_wide_one_warned_of():
    assert read("a\tb\t0.5\nb\tc\t2\n").report.weight_range == (0.5, 2)
    assert "weight_range" not in kinds(read("a\tb\t0.5\nb\tc\t2\n").report)
    assert kinds(read("a\tb\t1e-9\nb\tc\t2\n").report)["weight_range"]["low"] == 1e-9
    assert read("a\tb\nb\tc\n").report.weight_range is None


def test_provenance_and_label(tmp_path):
    packed = gzip.compress(b"a\tb\t1\n")
    path = tmp_path / "moss.v2.stress.tsv.gz"
    path.write_bytes(packed)
    reading = read_network(path)
    assert reading.network.label == "moss.v2.stress"
    assert reading.network.provenance == {
        "file": "moss.v2.stress.tsv.gz",
        "weight_column": "3",
        "sha256": hashlib.sha256(packed).hexdigest(),
    }
    assert reading.report.source == str(path)
    assert parse_network(b"a\tb\n", "C:\\data\\net.csv").network.label == "net"
    assert parse_network(b"a\tb\n", ".tsv").network.label
    assert parse_network(b"a\tb\n", "").network.label == "network"


def test_the_fingerprint_knows_neither_order_nor_direction_nor_packing():
    text = "source\ttarget\tweight\na\tb\t1\nb\tc\t2\na\ta\t1\n"
    other = "weight;target;source\n1;a;a\n2;b;c\n1;a;b\n"
    wanted = read(text).report.fingerprint
    assert read(other).report.fingerprint == wanted
    assert parse_network(gzip.compress(text.encode()), "x").report.fingerprint == wanted
    assert read(text.replace("\n", "\r\n")).report.fingerprint == wanted
    assert read(text, weight="none").report.fingerprint != wanted


@pytest.mark.parametrize(
    ("data", "kind"),
    [
        ("naïve\tβ-cat\n".encode(), None),
        ("naïve\tβ-cat\n".encode("utf-8-sig"), None),
        ("naïve\tβ-cat\n".encode("utf-16"), None),
        ("naïve\tcat\n".encode("latin-1"), "encoding"),
    ],
)
def test_encodings(data, kind):
    reading = parse_network(data, "x.tsv")
    assert "naïve" in reading.network.names
    assert [warning["kind"] for warning in reading.report.warnings] == ([kind] if kind else [])


def test_the_encoding_warning_names_the_line():
    report = parse_network("a\tb\nb\tnaïve\n".encode("latin-1"), "x.tsv").report
    assert kinds(report)["encoding"] == {"kind": "encoding", "read_as": "latin-1", "line": 2}


def test_several_gzip_members_are_read_as_one():
    data = gzip.compress(b"a\tb\n") + gzip.compress(b"b\tc\n")
    assert parse_network(data, "x").network.edge_count == 2


def test_blocks_join_without_a_seam():
    rows = [f"gene{number:06d},gene{number + 1:06d},0.{number:06d}1" for number in range(1, 150_000)]
    rows[139_999] = "gene140000,gene140001,x"
    text = "\n".join(rows)
    assert len(text) > BLOCK
    report = read(text).report
    assert report.edges == 149_998
    assert report.rejected == (Rejected(140_000, "weight 'x' is not a number"),)


@pytest.mark.parametrize("size", [1, 5, 17, 1000])
def test_blocks_of_any_size_hold_all_lines(size):
    text = '# c\n\na,b,1\n"c\nd",e,2\nf,g,3\n\n// x\nh,"i ""j""",4\n'
    found = list(blocks(text, size))
    lines = [line for block in found for line in zip(block.numbers, block.lines, strict=True)]
    kept = {3: "a,b,1", 4: '"c', 5: 'd",e,2', 6: "f,g,3", 9: 'h,"i ""j""",4'}
    assert dict(lines) == kept
    assert (sum(block.comments for block in found), sum(block.blank_lines for block in found)) == (2, 2)
    assert all(block.lines != ['"c'] for block in found), "a quoted cell was cut in two"


def test_clean_files_agree_with_networkx():
    graph = networkx.les_miserables_graph()  # 77 nodes, 254 edges
    lines = io.BytesIO()
    renamed = networkx.relabel_nodes(graph, {node: node.replace(" ", "_") for node in graph})
    networkx.write_weighted_edgelist(renamed, lines)
    expected = networkx.read_weighted_edgelist(io.BytesIO(lines.getvalue()))
    reading = parse_network(lines.getvalue(), "book.txt")
    assert (reading.report.nodes, reading.report.edges) == (77, 254)
    assert edges(reading) == {tuple(sorted((a, b))): weight for a, b, weight in expected.edges(data="weight")}
    assert reading.report.components == networkx.number_connected_components(expected)


def test_clean_files_agree_with_pandas():
    rng = np.random.default_rng(5)
    table = pd.DataFrame({"a": rng.integers(0, 50, 400), "b": rng.integers(50, 99, 400), "w": rng.random(400)})
    table = table.astype({"a": str, "b": str})
    reading = read(table.to_csv(sep="\t", index=False, header=["gene_a", "gene_b", "score"]))
    expected = table.groupby(["a", "b"])["w"].max()
    found = {tuple(sorted(pair, key=int)): weight for pair, weight in edges(reading).items()}
    assert found == expected.to_dict()
    assert reading.report.duplicates_merged == 400 - len(expected)


def test_tables_that_pandas_writes_with_its_index_are_read():
    table = pd.DataFrame({"source": ["tor1", "cor2"], "target": ["ar1", "tor1"], "weight": [0.5, 0.75]})
    assert edges(read(table.to_csv())) == WANTED
    unnamed = table.set_axis(["one_end", "other_end", "how"], axis=1)
    assert edges(read(unnamed.to_csv())) == WANTED
    assert edges(read(table.set_axis([0, 1, 2], axis=1).to_csv(index=False))) == WANTED


def test_the_report_becomes_json():
    reading = read("# c\nsource\ttarget\tweight\na\tb\t1\nb\ta\t2\nc\tc\t1\nd\te\tNA\nSep-02\tb\t1\n")
    plain = json.loads(json.dumps(reading.report.as_json()))
    wanted = {"format": "edge list", "separator": "tab", "rows": 5, "edges": 2, "nodes": 4, "self_loops": 1}
    wanted |= {"duplicates_merged": 1, "rejected": [{"line": 6, "reason": "weight is missing ('NA')"}]}
    wanted |= {"components": 2, "fingerprint": reading.network.fingerprint, "weight_column": "weight"}
    assert {key: plain[key] for key in wanted} == wanted
    assert {warning["kind"] for warning in plain["warnings"]} == {
        "duplicate_weights_differ",
        "isolated_nodes",
        "components",
        "spreadsheet_damage",
    }
    assert plain["columns"]["source"] == {"column": "source", "number": 1, "found": "named"}


def test_a_reading_travels_to_another_process():
    reading = read("a\tb\t1\n")
    again = pickle.loads(pickle.dumps(reading))  # noqa: S301
    assert again.network == reading.network
    assert again.report == reading.report


def test_progress_is_told_and_stops():
    told = []
    parse_network(b"a\tb\n", "x", progress=lambda fraction, phrase: told.append((fraction, phrase)))
    assert [fraction for fraction, _ in told] == sorted(fraction for fraction, _ in told)
    assert told[-1][0] == 1

    def stop(fraction: float, phrase: str) -> None:
        raise Cancelled

    with pytest.raises(Cancelled):
        parse_network(b"a\tb\n", "x", progress=stop)


def test_every_format_keeps_the_contract():
    for key, form in FORMATS.items():
        assert form.key == key
        assert 0 <= form.recognise("a\tb\n") <= 1
        assert form.recognise("") >= 0
    assert FORMATS["edge-list"].parse("a\tb\n", "x").rows == 1


def test_unknown_text_names_the_formats():
    with pytest.raises(InputError, match="line 1: the text looks like JSON; expected an edge list"):
        read('{"nodes": []}')
