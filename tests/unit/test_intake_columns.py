"""Header or data; which column is what; what the user asks for."""

from __future__ import annotations

import pytest

from analysis.errors import InputError
from analysis.intake import IntakeReport, parse_network


def report(text: str, **options) -> IntakeReport:
    return parse_network(text.encode(), "interactions.tsv", **options).report


def roles(found: IntakeReport) -> tuple[int, ...]:
    return tuple(role.number for role in found.columns.values())


@pytest.mark.parametrize(
    "names",
    [
        "source target weight",
        "Source Target Weight",
        "from to score",
        "protein_a protein_b combined_score",
        "protein1 protein2 combined_score",
        "gene_a gene_b confidence",
        "GeneA GeneB confidence",
        "node1 node2 weight",
        "Interactor_A Interactor_B Score",
        "bait prey value",
        "regulator target strength",
        "gene partner correlation",
        "id1 id2 pcc",
        "first second edge_weight",
    ],
)
def test_known_names_make_a_header(names):
    found = report(names.replace(" ", "\t") + "\ntor1\tar1\t0.5\ncor2\tar1\t0.7\n")
    assert found.header == tuple(names.split())
    assert (found.rows, found.edges) == (2, 2)
    assert found.columns["source"].found == found.columns["weight"].found == "named"
    assert found.weight_column == names.split()[2]


def test_two_known_names_make_a_header_without_weights():
    found = report("gene_a,gene_b\ntor1,ar1\n")
    assert (found.header, found.edges, found.weight_column) == (("gene_a", "gene_b"), 1, None)


@pytest.mark.parametrize(
    "text",
    [
        "a\tb\t1\nb\tc\t2\n",
        "a\tb\nb\tc\n",
        "gene1\tgene2\ngene2\tgene3\n",
        "gene1\tgene2\ngene3\tgene4\n",
        "gene1\tgene2\t0.5\ngene3\tgene4\t0.6\n",
        "node1 node2\nnode1 node3\nnode7 node9\n",
        "source\ttarget\ntarget\tsource\nsource\tother\n",
        "tor1\tar1\tNA\ncor2\tar1\t0.5\n",
        "tor1\tar1\t\ncor2\tar1\t0.5\n",
        "tor1\tar1\theavy\ncor2\tar1\t0.5\n",
        "1\t2\t0.5\n2\t3\t0.5\n",
        "0\t1\t2\n1\t5\t3\n",
        "A B 0.5\nB C 0.3\n",
        "x y\ny z\n",
        "tor1\tar1\n",
        "gene1\tgene2\n",
    ],
)
def test_a_first_row_of_data_is_not_eaten(text):
    found = report(text)
    assert found.header is None
    assert found.rows == len(text.splitlines())


def test_words_over_numbers_make_a_header_and_are_told():
    found = report("this\tthat\tmeasure\ntor1\tar1\t0.5\ncor2\tar1\t0.7\n")
    assert found.header == ("this", "that", "measure")
    assert found.columns["weight"].found == "guessed: the first column of numbers"
    assert found.warnings[0] == {"kind": "header_guessed", "line": 1}


def test_a_guessed_header_whose_labels_come_back_far_below_is_data():
    rows = "".join(f"p{number}\tq{number}\t0.5\n" for number in range(20_000))
    found = report("tor\tar\theavy\n" + rows + "cor\ttor\t0.5\n")
    assert found.header is None
    assert found.rows == 20_002
    assert [row.line for row in found.rejected] == [1]


def test_words_over_numbered_labels_make_a_header():
    found = report("this that\n1 2\n2 3\n")
    assert (found.header, found.nodes) == (("this", "that"), 3)


def test_a_header_in_a_comment_names_the_columns():
    found = report("# a file\n#weight\tsource\ttarget\n0.5\ttor1\tar1\n0.7\tcor2\tar1\n")
    assert found.header == ("weight", "source", "target")
    assert roles(found) == (2, 3, 1)
    assert (found.comments, found.rows) == (1, 2)
    plain = report("# written by hand\na\tb\t1\n")
    assert (plain.header, plain.comments) == (None, 1)


def test_names_decide_over_places():
    found = report("score\tnote\ttarget\tsource\n0.5\tx\ttor1\tar1\n0.6\tx\ttor1\tcor2\n")
    assert roles(found) == (4, 3, 1)
    wide = report(
        "id interactor a,id interactor b,alias interactor a,alias interactor b,taxid,score\n"
        "p1,p2,x,y,9606,0.5\np1,p3,x,z,9606,0.4\n"
    )
    assert roles(wide) == (1, 2, 6)


def test_the_surest_weight_name_wins():
    found = report("gene_a\tgene_b\texperiment_score\tcombined_score\na\tb\t1\t2\nb\tc\t1\t3\n")
    assert found.weight_column == "combined_score"
    other = report("gene_a\tgene_b\tmy_score\tn\na\tb\t1\t2\nb\tc\t1\t3\n")
    assert other.weight_column == "my_score"


def test_the_first_column_of_numbers_is_the_weight_where_no_name_tells():
    found = report("a\tb\tphysical\t0.5\t7\nb\tc\tgenetic\t0.6\t8\n")
    assert (found.weight_column, found.weight_range) == ("4", (0.5, 0.6))
    equal = report("a\tb\t1\nb\tc\t1\n")
    assert equal.weight_range == (1, 1)
    some = report("a\tb\t0.5\nb\tc\tNA\nc\td\t0.7\n")
    assert (some.weight_column, len(some.rejected)) == ("3", 1)
    text = report("a\tb\tphysical\nb\tc\tgenetic\n")
    assert text.weight_column is None


def test_columns_of_other_numbers_are_no_weights():
    found = report("gene_a\tgene_b\ttaxid\tpvalue\na\tb\t9606\t0.1\nb\tc\t9606\t0.2\n")
    assert found.weight_column is None
    assert {"kind": "unused_numbers", "columns": ["taxid", "pvalue"]} in found.warnings


def test_a_distance_is_warned_of():
    found = report("source\ttarget\tdistance\na\tb\t1\nb\tc\t2\n")
    assert found.weight_column == "distance"
    assert {"kind": "distance_column", "column": "distance"} in found.warnings
    asked = report("source\ttarget\tp.value\na\tb\t1\nb\tc\t2\n", weight="p.value")
    assert asked.warnings[0] == {"kind": "distance_column", "column": "p.value"}


@pytest.mark.parametrize(("weight", "wanted"), [("score", 3), ("SCORE", 3), ("4", 4), (" 4 ", 4), ("other", 4)])
def test_the_user_names_the_weight_column(weight, wanted):
    found = report("source\ttarget\tscore\tother\na\tb\t1\t2\nb\tc\t3\t4\n", weight=weight)
    assert found.columns["weight"].number == wanted
    assert found.columns["weight"].found == "given"


def test_weights_can_be_left_out():
    found = report("source\ttarget\tweight\na\tb\theavy\nb\tc\t0\n", weight="none", strict=True)
    assert (found.edges, found.weight_column, len(found.rejected)) == (2, None, 0)


def test_a_weight_in_the_first_column_moves_the_labels():
    assert roles(report("0.5\ta\tb\n0.6\tb\tc\n", weight="1")) == (2, 3, 1)


@pytest.mark.parametrize(
    ("text", "weight"),
    [("source\ttarget\tscore\na\tb\t1\n", None), ("a\tb\t1\n", None), ("a\tb\n", None), ("a\tb\t3\t4\n", "4")],
)
def test_reading_again_with_the_reported_column_gives_the_same(text, weight):
    first = report(text, weight=weight)
    again = report(text, weight=first.weight_column or "none")
    assert again.fingerprint == first.fingerprint


def test_columns_without_a_clear_name_go_by_number():
    found = report("source,target,score,score\na,b,1,2\nb,c,1,3\n")
    assert found.weight_column == "3"
    assert report("source,target,none\na,b,1\nb,c,2\n").weight_column == "3"


@pytest.mark.parametrize(
    ("text", "weight", "message"),
    [
        ("source\ttarget\tscore\na\tb\t1\n", "mass", "'source', 'target' and 'score', numbered 1 to 3"),
        ("source\ttarget\tscore\na\tb\t1\n", "4", "there is no column '4'"),
        ("source\ttarget\tscore\na\tb\t1\n", "0", "there is no column '0'"),
        ("source\ttarget\tscore\na\tb\t1\n", "", "there is no column ''"),
        ("a\tb\t1\n", "score", "no names and are numbered 1 to 3"),
        ("a\tb\n", "2", "only 1 column is left beside the weights"),
    ],
)
def test_a_weight_column_that_is_not_there(text, weight, message):
    with pytest.raises(InputError, match=message):
        report(text, weight=weight)


def test_text_for_a_weight_stops_a_strict_reading():
    wanted = (
        "interactions.tsv, line 2: weight 'heavy' is not a number; "
        "give a number or leave the column out with --weight none"
    )
    for text in ("source\ttarget\tweight\na\tb\theavy\n", "a\tb\t1\nb\tc\theavy\n"):
        with pytest.raises(InputError) as raised:
            report(text, strict=True)
        assert str(raised.value) == wanted
        assert raised.value.line == 2


def test_missing_and_unusable_weights_do_not_stop_a_strict_reading():
    found = report("a\tb\t1\nb\tc\tNA\nc\td\t\nd\te\t0\ne\tf\t-1\nf\tg\tinf\n", strict=True)
    assert (found.edges, len(found.rejected)) == (1, 5)


def test_tables_from_r_with_row_names():
    text = '"source" "target" "weight"\n"1" "heat shock" "b" 0.5\n"2" "b" "c" 0.7\n'
    found = report(text)
    assert roles(found) == (2, 3, 4)
    assert found.header == ("", "source", "target", "weight")
    named = report('"gene_a"\t"gene_b"\t"score"\n"r_x"\t"a"\t"b"\t1\n"r_y"\t"b"\t"c"\t2\n')
    assert roles(named) == (2, 3, 4)
    unnamed_weight = report("source\ttarget\na\tb\t0.5\nb\tc\t0.7\n")
    assert roles(unnamed_weight) == (1, 2, 3)
    bare = report("source\ttarget\n1\ta\tb\n2\tb\tc\n")
    assert roles(bare) == (2, 3)


def test_decimal_commas():
    found = report("a;b;0,5\nb;c;1\nc;d;1,5e-3\n")
    assert found.weight_range == (0.0015, 1)
    assert {"kind": "decimal_comma", "column": "3"} in found.warnings
    mixed = report("a\tb\t0.5\nb\tc\t0,7\n")
    assert [row.reason for row in mixed.rejected] == ["weight '0,7' is not a number"]


def test_a_table_of_values_is_doubted():
    found = report("gene\ts1\ts2\ntor1\t0.5\t1.5\nar1\t0.7\t2.5\ncor2\t0.1\t3.5\n")
    assert {"kind": "numbers_as_names", "column": "s1"} in found.warnings


def test_a_kind_of_interaction_in_the_second_column_is_doubted():
    found = report("a\tbinds\tb\nb\tbinds\tc\nc\tbinds\td\n")
    assert {"kind": "constant_label_column", "column": "2", "value": "binds"} in found.warnings


def test_a_header_of_thousands_of_columns_is_quick():
    header = "\t".join(f"protein_{number}" for number in range(5_000))
    row = "\t".join(["1"] * 5_000)
    assert report(f"{header}\n" + f"x{row}\n" * 3).rows >= 3
