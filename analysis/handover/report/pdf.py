"""One drawing as a PDF page, uncompressed (ISO 32000-1: 7.5 file structure, 8.5 paths, 8.4.5 states, 9 text).

Coordinates run as in SVG, from the upper left corner downwards; colours are `#rrggbb`. Text is set in Helvetica, which
every reader has; characters outside Windows code page 1252 become question marks.
"""

from __future__ import annotations

from collections.abc import Iterable

ROUND = 0.5522847498307936  # 4/3 (√2 − 1): how far the handles of a quarter circle reach
WIDE = 0.56
"""Mean width of a letter in Helvetica Bold, as a share of its size; enough to set plates and middles by."""


class Drawing:
    """Collects what is drawn; `page` returns the document.

    Parameters
    ----------
    width, height : float
        Of the page, in points (1/72 inch).
    scale : float
        Points for one unit of the drawing.
    """

    def __init__(self, width: float, height: float, scale: float = 1.0) -> None:
        self.width, self.height = width, height
        self._alphas: dict[tuple[float, float], str] = {}
        self._content = [f"{_n(scale)} 0 0 {_n(-scale)} 0 {_n(height)} cm"]

    def style(
        self, *, fill: str | None = None, stroke: str | None = None, width: float | None = None, alpha: float = 1.0
    ) -> None:
        """Set colours, width of lines and opacity for what follows."""
        name = self._alphas.setdefault((alpha, alpha), f"A{len(self._alphas)}")
        self._content.append(f"/{name} gs")
        if fill is not None:
            self._content.append(f"{_rgb(fill)} rg")
        if stroke is not None:
            self._content.append(f"{_rgb(stroke)} RG")
        if width is not None:
            self._content.append(f"{_n(width)} w")

    def segments(self, ends: Iterable[tuple[float, float, float, float]], *, round_caps: bool = False) -> None:
        """Draw lines as one path, so that where they cross they are no darker."""
        paths = " ".join(f"{_n(x)} {_n(y)} m {_n(u)} {_n(v)} l" for x, y, u, v in ends)
        if paths:
            self._content.append(f"{1 if round_caps else 0} J {paths} S")

    def disc(self, x: float, y: float, radius: float) -> None:
        """Draw a disc with its rim."""
        r, h = radius, radius * ROUND
        quarters = [
            (x + r, y + h, x + h, y + r, x, y + r),
            (x - h, y + r, x - r, y + h, x - r, y),
            (x - r, y - h, x - h, y - r, x, y - r),
            (x + h, y - r, x + r, y - h, x + r, y),
        ]
        curves = " ".join(f"{' '.join(_n(value) for value in quarter)} c" for quarter in quarters)
        self._content.append(f"{_n(x + r)} {_n(y)} m {curves} b")

    def box(self, x: float, y: float, width: float, height: float) -> None:
        """Fill a rectangle."""
        self._content.append(f"{_n(x)} {_n(y)} {_n(width)} {_n(height)} re f")

    def text(self, text: str, x: float, y: float, size: float, *, bold: bool = False, middle: bool = False) -> None:
        """Set one line of text from a point of its base line, or with its middle there."""
        if middle:
            x -= WIDE * size * len(text) / 2
        font = "F2" if bold else "F1"
        self._content.append(f"BT /{font} {_n(size)} Tf 1 0 0 -1 {_n(x)} {_n(y)} Tm {_string(text)} Tj ET")

    def page(self, title: str) -> bytes:
        """Return the document: one page, the same bytes for the same drawing."""
        states = " ".join(
            f"/{name} << /ca {_n(fill)} /CA {_n(stroke)} >>" for (fill, stroke), name in self._alphas.items()
        )
        content = "\n".join(self._content).encode("ascii")
        fonts = [
            f"<< /Type /Font /Subtype /Type1 /BaseFont /{name} /Encoding /WinAnsiEncoding >>"
            for name in ("Helvetica", "Helvetica-Bold")
        ]
        objects = [
            b"<< /Type /Catalog /Pages 2 0 R >>",
            b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
            (
                f"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 {_n(self.width)} {_n(self.height)}] /Contents 4 0 R "
                f"/Resources << /Font << /F1 5 0 R /F2 6 0 R >> /ExtGState << {states} >> >> >>"
            ).encode("ascii"),
            f"<< /Length {len(content)} >>\nstream\n".encode("ascii") + content + b"\nendstream",
            *(font.encode("ascii") for font in fonts),
            f"<< /Title {_string(title)} /Producer (corymb) >>".encode("ascii"),
        ]
        return _document(objects)


def _document(objects: list[bytes]) -> bytes:
    """Return the file of these numbered objects, with the table of their places (ISO 32000-1, 7.5.4)."""
    written = b"%PDF-1.4\n%\xe2\xe3\xcf\xd3\n"
    places = []
    for number, content in enumerate(objects, start=1):
        places.append(len(written))
        written += f"{number} 0 obj\n".encode("ascii") + content + b"\nendobj\n"
    table = "".join(f"{place:010d} 00000 n \n" for place in places)
    size = len(objects) + 1
    trailer = f"trailer\n<< /Size {size} /Root 1 0 R /Info {len(objects)} 0 R >>\nstartxref\n{len(written)}\n%%EOF\n"
    return written + f"xref\n0 {size}\n0000000000 65535 f \n{table}{trailer}".encode("ascii")


def _n(value: float) -> str:
    text = f"{value:.3f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _rgb(colour: str) -> str:
    return " ".join(_n(int(colour[place : place + 2], 16) / 255) for place in (1, 3, 5))


def _string(text: str) -> str:
    """Return a text as a PDF string of hexadecimal digits: nothing in it can end it."""
    return f"<{text.encode('cp1252', 'replace').hex()}>"
