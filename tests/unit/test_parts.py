"""Tables of the reading pane: light where they can be, whole otherwise."""

from __future__ import annotations

import json

from dash import html

from app.parts import bar, link, number, table


def test_a_table_of_genes_is_one_component_that_holds_everything():
    rows = [
        [link(f"g{place}", {"type": "pick-gene", "gene": f"g{place}"}), html.Span([bar(0.5), "0.50"])]
        for place in (0, 1)
    ]
    made = table(["gene", "stays"], rows, numeric=[1], name="Genes")
    assert getattr(made, "children", None) is None
    held = json.loads(getattr(made, "data-table"))
    assert held["type"] == "Table"
    assert held["props"]["aria-label"] == "Genes"
    head, body = held["props"]["children"]
    assert [cell["props"]["children"] for cell in head["props"]["children"]["props"]["children"]] == ["gene", "stays"]
    first, second = body["props"]["children"][0]["props"]["children"]
    assert first["props"]["children"]["props"]["id"] == {"type": "pick-gene", "gene": "g0"}
    assert second["props"]["className"] == "number"


def test_names_that_look_like_code_stay_text():
    made = table(["gene"], [["<script>alert(1)</script>"]], name="Genes")
    assert (
        "<script>alert(1)</script>"
        in json.loads(getattr(made, "data-table"))["props"]["children"][1]["props"]["children"][0]["props"]["children"][
            0
        ]["props"]["children"]
    )


def test_a_table_with_other_buttons_stays_with_dash():
    made = table(["clustering"], [[link("Leiden", {"type": "return-to", "study": "s"})]], name="Trail")
    assert isinstance(made, html.Table)


def test_small_figures_keep_two_that_count():
    assert [number(value) for value in (0.0, 0.5, 0.0049, 0.00002, 1234, float("nan"), None)] == [
        "0.00",
        "0.50",
        "0.0049",
        "2.0e-05",
        "1,234",
        "–",
        "–",
    ]
