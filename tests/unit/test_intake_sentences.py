"""The report in plain words."""

from __future__ import annotations

from analysis.intake import parse_network
from analysis.intake.sentences import WARNINGS, warning_sentence
from analysis.intake.wording import counted, listed, shown, with_article


def sentences(text: str, **options) -> str:
    return "\n".join(parse_network(text.encode(), "moss.tsv", **options).report.sentences())


def test_a_clean_file():
    assert sentences("source\ttarget\tscore\na\tb\t0.5\nb\tc\t1\n").splitlines() == [
        "moss.tsv was read as an edge list, parted by tabs: 2 rows.",
        "Nodes are in column 'source' and column 'target' (known by name); weights in column 'score' (known by name).",
        "They give 3 nodes and 2 edges, with weights from 0.5 to 1.",
        "No row was rejected.",
    ]


def test_rows_that_were_left_out_are_told_with_their_lines():
    rows = "a\tb\t1\nb\ta\t1\nc\tc\t1\n" + "x\ty\tNA\n" * 5 + "x\ty\t0\n"
    text = sentences("# c\n\n" + rows)
    assert "9 rows, besides 1 comment line and 1 blank line." in text
    assert "1 row repeated a pair and was merged; the largest weight was kept." in text
    assert "1 row joined a node to itself: counted, not kept as edges." in text
    assert "Of 9 rows, 6 were rejected (66.7%):" in text
    assert "5 rows with no weight (lines 6, 7, 8 and 2 more)." in text
    assert "1 row with a weight of zero (line 11)." in text


def test_an_asked_for_column_and_equal_weights():
    text = sentences("a\tb\t2\nb\tc\t2\n", weight="3")
    assert "weights in column 3 (as asked)" in text
    assert "2 edges, all of weight 2." in text
    assert "no weights." in sentences("a\tb\n")


def test_every_kind_of_warning_has_a_sentence():
    text = {
        "encoding": "aé\tb\n",
        "header_guessed": "this\tthat\tthing\na\tb\t1\n",
        "distance_column": "source\ttarget\tdistance\na\tb\t1\n",
        "decimal_comma": "a;b;0,5\n",
        "unused_numbers": "source\ttarget\tpvalue\na\tb\t0.5\n",
        "numbers_as_names": "a\t0.5\nb\t0.7\nc\t0.1\n",
        "constant_label_column": "a\tbinds\tb\nb\tbinds\tc\nc\tbinds\td\n",
        "case_differences": "Tor1\ttor1\n",
        "spreadsheet_damage": "2-Sep\tar1\n",
        "placeholder_names": "NA\tar1\n",
        "invisible_characters": "ar\u200b1\tar1\n",
        "blanks_trimmed": " a\tb\n",
        "duplicate_weights_differ": "a\tb\t1\nb\ta\t2\n",
        "isolated_nodes": "a\tb\nc\tc\n",
        "components": "a\tb\nc\td\n",
        "weight_range": "a\tb\t1e-9\nb\tc\t1\n",
    }
    assert set(text) == set(WARNINGS)
    for kind, content in text.items():
        data = content.encode("latin-1" if kind == "encoding" else "utf-8")
        report = parse_network(data, "x.tsv").report
        warning = next(warning for warning in report.warnings if warning["kind"] == kind)
        sentence = warning_sentence(warning)
        assert sentence in report.sentences()
        assert sentence.endswith(".") or "?" in sentence
        assert sentence[0].isupper() or sentence[0].isdigit()


def test_a_kind_that_a_later_format_brings_is_told_too():
    assert warning_sentence({"kind": "negative_interactions"}) == "Note: negative interactions."


def test_pieces_of_sentences():
    assert shown("heavy") == "'heavy'"
    assert shown("a\tb\x1b") == r"'a\tb\x1b'"
    assert len(shown("x" * 1000)) == 42
    assert counted(1, "row") == "1 row"
    assert counted(12_000, "row") == "12,000 rows"
    assert listed(["a"]) == "a"
    assert listed(["a", "b", "c"]) == "a, b and c"
    assert listed([]) == ""
    assert with_article("edge list") == "an edge list"
    assert with_article("matrix") == "a matrix"
