"""Serves the map's test page on a loopback port, with the scripts in Dash's order and a strict content policy."""

from __future__ import annotations

import argparse
import contextlib
import tempfile
import threading
from collections.abc import Iterator
from http.server import SimpleHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path
from typing import Any

from map_page import fake_network

PAGE = Path(__file__).parent
ASSETS = PAGE.parents[2] / "assets"
NOT_HERE = {"glue.js"}  # joins the map to Dash, which this page does without
SIZES = {"50": (50, 160, 5), "906": (906, 2871, 48), "2000": (2000, 8000, 40), "5000": (5000, 25_000, 70)}
SIZES["20000"] = (20_000, 300_000, 140)
POLICY = (
    "default-src 'self'; script-src 'self'; style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; "
    "worker-src 'self' blob:; object-src 'none'; base-uri 'none'"
)


def asset_tags() -> str:
    """Return the tags of all style sheets and scripts, top folder first, then the subfolders, each in order."""
    folders = sorted({path.parent for path in ASSETS.rglob("*") if path.is_file()})
    files = [path for folder in folders for path in sorted(folder.iterdir()) if path.name not in NOT_HERE]
    places = [(path.suffix, path.relative_to(ASSETS).as_posix()) for path in files]
    styles = [f'<link rel="stylesheet" href="/assets/{place}">' for suffix, place in places if suffix == ".css"]
    scripts = [f'<script src="/assets/{place}"></script>' for suffix, place in places if suffix == ".js"]
    return "\n".join([*styles, *scripts])


class Handler(SimpleHTTPRequestHandler):
    """Answers with the page, its script, the assets and the invented data."""

    data: Path
    protocol_version = "HTTP/1.1"

    def translate_path(self, path: str) -> str:
        """Return the file behind an address."""
        place = path.split("?", maxsplit=1)[0].lstrip("/")
        for prefix, folder in (("assets/", ASSETS), ("data/", self.data)):
            if place.startswith(prefix):
                return str(folder / place.removeprefix(prefix))
        return str(PAGE / place)

    def do_GET(self) -> None:
        """Answer; the page itself gets its tags first."""
        if self.path.split("?")[0] != "/":
            super().do_GET()
            return
        text = (PAGE / "page.html").read_text(encoding="utf-8").replace("<!-- assets -->", asset_tags())
        body = text.encode()
        self.send_response(200)
        self.send_header("Content-Type", "text/html; charset=utf-8")
        self.send_header("Content-Length", str(len(body)))
        self.end_headers()
        self.wfile.write(body)

    def end_headers(self) -> None:
        """Send the content policy with everything."""
        self.send_header("Content-Security-Policy", POLICY)
        self.send_header("Cache-Control", "no-store")
        super().end_headers()

    def log_message(self, format: str, *args: Any) -> None:  # noqa: A002
        """Stay silent."""


def make_data(folder: Path, sizes: list[str]) -> None:
    """Write the invented networks of these sizes, one folder each."""
    for size in sizes:
        nodes, edges, modules = SIZES[size]
        fake_network.write(fake_network.make(nodes, edges, modules, seed=7), folder / size)


@contextlib.contextmanager
def served(data: Path, port: int = 0) -> Iterator[str]:
    """Serve the page until the block ends; yields its address."""
    handler = type("DataHandler", (Handler,), {"data": data})
    server = ThreadingHTTPServer(("127.0.0.1", port), handler)
    thread = threading.Thread(target=server.serve_forever, daemon=True)
    thread.start()
    try:
        yield f"http://127.0.0.1:{server.server_port}/"
    finally:
        server.shutdown()
        server.server_close()
        thread.join()


def main() -> None:
    """Serve by hand, for looking at the page in a browser."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--port", type=int, default=8321)
    parser.add_argument("sizes", nargs="*", default=["906"], help=f"some of {', '.join(SIZES)}")
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        make_data(Path(folder), given.sizes)
        with served(Path(folder), given.port) as address, contextlib.suppress(KeyboardInterrupt):
            print(f"{address}?data={given.sizes[0]}")  # noqa: T201
            threading.Event().wait()


if __name__ == "__main__":
    main()
