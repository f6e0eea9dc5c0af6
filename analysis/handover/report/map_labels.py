"""Module numbers on white plates over the map, the largest first, none upon another."""

from __future__ import annotations

from analysis.colours import SMALLEST_COLOURED
from analysis.handover.report.markup import Markup, short, tag
from analysis.network import FloatArray
from analysis.study import Study

LETTER, PLATE = 8.4, 22.0
"""Width of a letter and height of a plate, in units of the sheet."""


def labels_of(study: Study, middles: FloatArray) -> Markup:
    """Return a plate with number and name for each module that has a colour of its own and room for a plate.

    Parameters
    ----------
    middles : float64 array, shape (modules, 2)
        Where the plates stand.
    """
    placed: list[tuple[float, float, float]] = []
    plates = []
    for module, members in enumerate(study.modules.members):
        if len(members) < SMALLEST_COLOURED:
            break
        text = _text(study, module)
        x, y = middles[module].tolist()
        half = (LETTER * len(text) + 12) / 2
        if any(abs(x - u) < half + other and abs(y - v) < PLATE + 1 for u, v, other in placed):
            continue
        placed.append((x, y, half))
        plates.append(_plate(text, x, y, half))
    return tag("g", plates, text_anchor="middle", font_weight="700")


def _text(study: Study, module: int) -> str:
    name = study.settings.names.get(f"M{module + 1}", "")
    return f"M{module + 1} {short(name, 24)}" if name else f"M{module + 1}"


def _plate(text: str, x: float, y: float, half: float) -> Markup:
    plate = tag(
        "rect",
        x=x - half,
        y=y - PLATE / 2,
        width=2 * half,
        height=PLATE,
        rx=4,
        fill="#fff",
        fill_opacity=0.88,
    )
    return tag("g", plate, tag("text", text, x=x, y=y + 5, style="font-size:14px;fill:#1d2a2f"))
