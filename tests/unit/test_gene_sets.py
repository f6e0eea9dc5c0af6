"""Gene-set files of three kinds, alias tables, and what of them matches a network."""

from __future__ import annotations

import gzip

import pytest

from analysis.errors import InputError, SettingError
from analysis.gene_sets import Aliases, GeneSets, NameRow, match, parse_aliases, parse_gene_sets, parse_ontology

SET_LINES = "alpha\tfirst set\tg1\tg2\tg3\nbeta\t\tg3\tg4\tg4\n\n# a remark\ngamma\tno genes\n"


def members(sets: GeneSets, name: str) -> list[str]:
    return [sets.genes[gene] for gene in sets.members[sets.index[name]].tolist()]


def reading(text: str, **options: object):
    return parse_gene_sets(text.encode(), "sets.tsv", **options)  # type: ignore[arg-type]


def test_set_lines_give_sets_and_say_what_they_left_out():
    found = reading(SET_LINES)
    assert found.sets.names == ("alpha", "beta")
    assert found.sets.descriptions == ("first set", "")
    assert members(found.sets, "beta") == ["g3", "g4"]
    assert (found.report.rows, found.report.repeated) == (3, 1)
    assert [(each.line, each.reason) for each in found.report.rejected] == [(5, "the set 'gamma' has no genes")]
    assert found.report.format == "set lines"
    assert len(found.sets.provenance["sha256"]) == 64


def test_a_set_on_two_lines_is_joined_and_told():
    found = reading("a\t\tg1\tg2\nb\t\tg1\tg3\na\t\tg3\n")
    assert members(found.sets, "a") == ["g1", "g2", "g3"]
    assert found.report.joined == ("a",)
    assert "stood on several lines" in " ".join(found.report.sentences())


@pytest.mark.parametrize(
    "text",
    [
        "gene\tset\ng1\tx\ng2\tx\ng3\ty\n",
        "set,gene\nx,g1\nx,g2\ny,g3\n",
        "g1;x\ng2;x\ng3;y\n",
        "x\tg1\nx\tg2\ny\tg3\n",
    ],
    ids=["gene first", "set first, commas", "semicolons, no header", "set first, no header"],
)
def test_two_columns_in_either_order(text):
    found = reading(text)
    assert found.report.format == "two columns"
    assert members(found.sets, "x") == ["g1", "g2"]
    assert members(found.sets, "y") == ["g3"]


def test_the_network_s_names_decide_which_column_holds_genes():
    text = "t1\tg1\nt2\tg1\nt3\tg2\nt4\tg2\n"  # more sets than genes: counting alone would take them for genes
    assert reading(text).sets.names == ("g1", "g2")
    assert reading(text, known={"g1", "g2"}).sets.names == ("t1", "t2", "t3", "t4")


def test_gzip_crlf_and_names_with_commas():
    found = parse_gene_sets(gzip.compress(b"a\t\tADE5,7\tSEPT2\r\nb\t\tADE5,7\t1-Mar\r\n"), "sets.tsv.gz")
    assert found.sets.genes == ("1-Mar", "ADE5,7", "SEPT2")
    assert "spreadsheet" in " ".join(found.report.notes)


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "the file is empty"),
        (b"# only\n", "no row but comments"),
        (b"some words without tabs\n", "these are no gene sets"),
        (b"g1\tx\t1\ng2\tx\t2\ng3\ty\t3\n", "three columns"),
        (b"a\t\tg1\0\tg2\n", "binary content"),
        (b"a\tno genes\t\t\nb\tnone\t\t\n", "has no genes"),
    ],
)
def test_what_is_no_gene_sets_is_refused_in_one_sentence(content, words):
    with pytest.raises(InputError, match=words):
        parse_gene_sets(content, "sets.tsv")


def test_settings_of_annotations_do_not_fit_other_files():
    with pytest.raises(SettingError, match="belong to GAF"):
        reading(SET_LINES, aspect="P")


# matching


def test_names_match_as_written_by_alias_or_not_at_all():
    sets = GeneSets.from_names([("a", "", ["g1", "tag2", "old3", "shared", "G4", "zz"]), ("b", "", ["zz"])])
    aliases = Aliases(
        (
            NameRow(("tag1", "g1")),
            NameRow(("tag2", "g2"), ("shared",)),
            NameRow(("tag3", "g3"), ("old3", "shared", "g1")),
        )
    )
    matched, report = match(sets, ["g1", "g2", "g3", "g4"], aliases)
    assert members(matched, "a") == ["g1", "g2", "g3"]
    assert (report.exact, report.by_alias) == (1, 2)
    assert report.ambiguous == ("shared",)
    assert set(report.unmatched) == {"G4", "zz"}
    assert report.by_case == 1
    assert report.empty_sets == 1
    assert "capitals" in " ".join(report.sentences())


def test_a_symbol_that_two_records_share_is_no_doubt():
    sets = GeneSets.from_names([("a", "", ["id1", "id2"])])
    aliases = Aliases((NameRow(("id1", "symbol")), NameRow(("id2", "symbol"))))
    matched, report = match(sets, ["other", "symbol"], aliases)
    assert members(matched, "a") == ["symbol"]
    assert (report.by_alias, report.merged) == (2, 1)


def test_a_name_that_is_also_a_synonym_of_another_gene_is_taken_as_written_and_told():
    aliases = Aliases((NameRow(("g1",)), NameRow(("g2",), ("g1",))))
    matched, report = match(GeneSets.from_names([("a", "", ["g1"])]), ["g1", "g2"], aliases)
    assert members(matched, "a") == ["g1"]
    assert report.ambiguous == ()


def test_no_match_at_all_is_an_error_that_shows_both_kinds_of_names():
    sets = GeneSets.from_names([("a", "", ["ENS1", "ENS2"])])
    with pytest.raises(InputError, match=r"'ENS1' and 'ENS2', the network 'g1'.*alias table"):
        match(sets, ["g1"])


def test_alias_tables_tell_synonyms_by_their_header():
    table = parse_aliases(b"locus_tag\tsymbol\tsynonym_1\nT1\tg1\told1|older1\nT2\tg2\t\n", "aliases.tsv")
    assert table.rows == (NameRow(("T1", "g1"), ("old1", "older1")), NameRow(("T2", "g2")))
    bare = parse_aliases(b"T1,g1,old1\n", "aliases.csv")
    assert bare.rows == (NameRow(("T1", "g1"), ("old1",)),)
    with pytest.raises(InputError, match="no row holds two names"):
        parse_aliases(b"alone\n", "aliases.tsv")


# annotations: GAF 2.2 ("GO Annotation File (GAF) format 2.2", Gene Ontology Consortium) and OBO 1.2 ("The OBO Flat File
# Format Guide, version 1.2"), written by hand after these documents; genes and terms are invented


def annotation(gene: str, term: str, code: str = "IDA", aspect: str = "P", relation: str = "involved_in") -> str:
    cells = ["SMM", f"id_{gene}", gene, relation, term, "PMID:1", code, "", aspect, "", f"syn_{gene}|x{gene}"]
    return "\t".join([*cells, "protein", "taxon:1", "20260101", "SMM", "", ""])


GAF = "\n".join(
    [
        "!gaf-version: 2.2",
        "!generated-by: nobody",
        annotation("g1", "GO:0000003"),
        annotation("g2", "GO:0000003", "IEA"),
        annotation("g3", "GO:0000002"),
        annotation("g4", "GO:0000003"),
        annotation("g4", "GO:0000002", relation="NOT|involved_in"),
        annotation("g5", "GO:0000010", aspect="F", relation="enables"),
        annotation("g6", "GO:0000001", "ND"),
        annotation("g7", "GO:0000099"),
        annotation("g8", "GO:0000033"),
        "too\tshort",
    ]
)
OBO = """format-version: 1.2
data-version: releases/2026-01-01

[Term]
id: GO:0000001
name: biological process
namespace: biological_process

[Term]
id: GO:0000002
name: tide living
namespace: biological_process
is_a: GO:0000001 ! biological process

[Term]
id: GO:0000003
name: ebb living
namespace: biological_process
alt_id: GO:0000033
is_a: GO:0000002 {source="nobody"} ! tide living
relationship: regulates GO:0000004 ! not to be followed

[Term]
id: GO:0000004
name: glaze
namespace: biological_process
is_a: GO:0000001

[Term]
id: GO:0000010
name: salt pump
namespace: molecular_function
relationship: part_of GO:0000004 ! glaze

[Term]
id: GO:0000099
name: gone
namespace: biological_process
is_obsolete: true

[Typedef]
id: part_of
name: part of
"""


def gaf(**options: object):
    return parse_gene_sets(GAF.encode(), "moss.gaf", **options)  # type: ignore[arg-type]


def test_annotations_stand_as_written_without_an_ontology():
    found = gaf()
    assert found.report.format == "GAF"
    assert members(found.sets, "GO:0000003") == ["id_g1", "id_g2", "id_g4"]
    assert members(found.sets, "GO:0000002") == ["id_g3"]
    assert "GO:0000001" not in found.sets.index  # ND says that nothing is known
    assert [each.line for each in found.report.rejected] == [12]
    matched, report = match(found.sets, ["g1", "g3", "xg4"], Aliases(found.synonyms))
    assert members(matched, "GO:0000003") == ["g1", "xg4"]
    assert report.by_alias == 3


def test_evidence_codes_and_aspects_are_left_out_on_request():
    found = gaf(evidence_out=("IEA", "ISS"), aspect="P")
    assert members(found.sets, "GO:0000003") == ["id_g1", "id_g4"]
    assert members(found.sets, "GO:0000001") == ["id_g6"]
    assert "GO:0000010" not in found.sets.index
    words = " ".join(found.report.notes)
    assert "1 annotation with evidence IEA was left out" in words
    assert "No annotation has the evidence code ISS" in words
    with pytest.raises(SettingError, match="P \\(process\\)"):
        gaf(aspect="X")


def test_annotations_are_propagated_along_is_a_and_part_of_and_not_is_honoured():
    found = gaf(ontology=parse_ontology(OBO.encode(), "moss.obo"))
    sets = found.sets
    # g4 is denied for GO:0000002, so it is in neither that set nor the one below it, yet in the one above
    assert members(sets, "GO:0000003") == ["id_g1", "id_g2", "id_g8"]
    assert members(sets, "GO:0000002") == ["id_g1", "id_g2", "id_g3", "id_g8"]
    assert members(sets, "GO:0000004") == ["id_g5"]  # by part_of from a function; not by regulates
    assert members(sets, "GO:0000001") == ["id_g1", "id_g2", "id_g3", "id_g4", "id_g5", "id_g8"]
    assert sets.descriptions[sets.index["GO:0000003"]] == "ebb living"
    assert "GO:0000099" not in sets.index
    words = " ".join(found.report.notes)
    assert "2 memberships contradicted by a NOT row were taken back" in words
    assert "obsolete" in words
    assert "releases/2026-01-01" in words


def test_an_aspect_is_chosen_after_propagation():
    found = gaf(ontology=parse_ontology(OBO.encode(), "moss.obo"), aspect="P")
    assert "GO:0000010" not in found.sets.index
    assert members(found.sets, "GO:0000004") == ["id_g5"]


def test_terms_in_a_circle_do_not_hold_the_reading_up():
    circle = "[Term]\nid: GO:0000002\nis_a: GO:0000003\n\n[Term]\nid: GO:0000003\nis_a: GO:0000002\n"
    found = gaf(ontology=parse_ontology(circle.encode(), "circle.obo"))
    assert members(found.sets, "GO:0000002") == members(found.sets, "GO:0000003")


def test_what_is_no_ontology_is_refused():
    with pytest.raises(InputError, match="no \\[Term\\]"):
        parse_ontology(b"nothing here\n", "moss.obo")


def test_a_file_that_leaves_no_annotation_is_an_error():
    with pytest.raises(InputError, match="no annotation is left"):
        gaf(evidence_out=("IDA", "IEA", "ND"))
