"""The sheet of keys."""

from __future__ import annotations

from dash import html

from app.parts import sentence, table
from app.view import Pane

KEYS = (
    ("Tab, Shift Tab", "move through the page"),
    ("/", "to the field where genes and modules are typed"),
    ("Escape", "back from a passport to the station"),
    ("arrow keys on the ruler", "coarser, finer; Home and End for the ends"),
    ("arrow keys on the map", "move the map"),
    ("+ and −", "nearer, farther"),
    ("0", "the whole network"),
    ("Enter on the map", "open the module in the middle"),
)


def keys_pane() -> Pane:
    """Return the sheet."""
    rows = [[html.Kbd(keys), text] for keys, text in KEYS]
    return Pane(
        "keys",
        [sentence("Everything works from the keyboard.", first=True), table(["keys", ""], rows, name="Keys")],
        [],
    )
