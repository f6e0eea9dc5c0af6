"""What holds for every edge list."""

from __future__ import annotations

import csv
import gzip
import io
import random

from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.errors import InputError
from analysis.intake import Reading, parse_network

NAMES = st.text(st.sampled_from("abcXYZ019_.-'|:βé"), min_size=1, max_size=6).filter(
    lambda name: name[0] not in "-'." and not name.isdecimal()
)
WEIGHTS = st.floats(1e-6, 1e6, allow_nan=False).map(repr)
ROWS = st.lists(st.tuples(NAMES, NAMES, WEIGHTS), min_size=1, max_size=25)
HEADER = ("source", "target", "weight")

CELLS = st.sampled_from(
    ["", " ", "a", "b", "c", "A", "0", "1", "2.5", "-1", "NA", "inf", "heavy", '"', '"a"', "1e400", "#"]
)
MESSY = st.lists(st.lists(CELLS, min_size=0, max_size=5), min_size=1, max_size=12)
SEPARATORS = st.sampled_from(["\t", ",", ";", " "])


def written(rows: list[tuple[str, ...]], separator: str = "\t", end: str = "\n", header: bool = True) -> bytes:
    stream = io.StringIO()
    writer = csv.writer(stream, delimiter=separator, lineterminator=end)
    if header:
        writer.writerow(HEADER)
    writer.writerows(rows)
    return stream.getvalue().encode()


def read(data: bytes) -> Reading:
    return parse_network(data, "any.tsv")


def attempt(data: bytes) -> tuple[Reading | None, str]:
    try:
        return read(data), ""
    except InputError as error:
        return None, str(error)


@settings(deadline=None)
@given(ROWS)
def test_edges_are_those_of_the_rows(rows):
    wanted: dict[tuple[str, str], float] = {}
    for one, two, weight in rows:
        pair = (min(one, two), max(one, two))
        if one != two:
            wanted[pair] = max(wanted.get(pair, 0), float(weight))
    network = read(written(rows)).network
    ends = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    found = [(network.names[a], network.names[b]) for a, b in ends]
    assert dict(zip(found, network.edge_weights.tolist(), strict=True)) == wanted
    assert set(network.names) == {name for row in rows for name in row[:2]}


@settings(deadline=None)
@given(ROWS, st.randoms(use_true_random=False), st.sampled_from(["\n", "\r\n", "\r"]), SEPARATORS)
def test_the_writing_does_not_change_the_fingerprint(rows, dice: random.Random, end, separator):
    wanted = read(written(rows)).report
    shuffled = [(two, one, weight) if dice.random() < 0.5 else (one, two, weight) for one, two, weight in rows]
    dice.shuffle(shuffled)
    data = written(shuffled, separator, end)
    for again in (data, gzip.compress(data), b"\xef\xbb\xbf" + data, b"# comment\n\n" + data):
        report = read(again).report
        assert report.fingerprint == wanted.fingerprint
        assert report.rows == wanted.rows == len(rows)
        assert (report.edges, report.self_loops, report.duplicates_merged) == (
            wanted.edges,
            wanted.self_loops,
            wanted.duplicates_merged,
        )


@settings(deadline=None)
@given(ROWS)
def test_without_a_header_no_row_is_lost(rows):
    report = read(written(rows, header=False)).report
    assert report.header is None
    assert report.rows == len(rows)
    assert report.fingerprint == read(written(rows)).report.fingerprint


@settings(deadline=None)
@given(ROWS, st.permutations([0, 1, 2]))
def test_named_columns_may_stand_in_any_order(rows, order):
    lines = [HEADER, *rows]
    data = written([tuple(line[place] for place in order) for line in lines], header=False)
    assert read(data).report.fingerprint == read(written(rows)).report.fingerprint


@settings(deadline=None, max_examples=300)
@given(MESSY, SEPARATORS, st.booleans())
def test_every_row_is_accounted_for(rows, separator, header):
    text = "\n".join(separator.join(row) for row in ([list(HEADER)] if header else []) + rows)
    reading, error = attempt(text.encode())
    if reading is None:
        assert error.startswith("any.tsv")
        return
    report = reading.report
    assert report.rows == report.edges + report.self_loops + report.duplicates_merged + len(report.rejected)
    assert report.nodes == reading.network.node_count
    assert report.edges == reading.network.edge_count
    lines = [row.line for row in report.rejected]
    assert lines == sorted(set(lines))
    assert all(1 <= line <= len(text.split("\n")) for line in lines)
    assert report.sentences()
    assert report.as_json()["fingerprint"] == reading.network.fingerprint


@settings(deadline=None, max_examples=300)
@given(st.binary(max_size=200))
def test_any_bytes_end_in_a_network_or_in_one_message(data):
    reading, error = attempt(data)
    assert "\n" not in error
    assert reading is None or reading.report.nodes > 0
