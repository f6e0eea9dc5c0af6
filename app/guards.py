"""What the server refuses, and what it forbids the browser.

Served to this machine alone, the dashboard is still within reach of every page that the user's browser has open. So a
request must name this server as its host (a foreign name may be made to point here), whatever changes something must
come from one of our own pages, and our pages may load nothing from anywhere else.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from urllib.parse import urlsplit

from flask import Flask, Response, request
from werkzeug.exceptions import RequestEntityTooLarge

LOOPBACK = ("127.0.0.1", "localhost", "[::1]")
MEGABYTE = 1_000_000
UPLOAD_LIMIT = 300 * MEGABYTE
READING = frozenset({"GET", "HEAD", "OPTIONS"})
FOREIGN_SITES = frozenset({"cross-site", "same-site"})
LASTING_PATHS = ("/assets/", "/_dash-component-suites/", "/_favicon.ico")
HOST_AND_PORT = re.compile(r"(\[[0-9a-f:.]+\]|[^:\[\]]+)(?::(\d+))?")

HEADERS = {
    "X-Content-Type-Options": "nosniff",
    "X-Frame-Options": "DENY",
    # Not `no-referrer`: with that, browsers send our own forms with the origin "null".
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(), geolocation=(), microphone=()",
}

Refusal = tuple[str, int, dict[str, str]]


def install_guards(
    server: Flask,
    *,
    port: int | None,
    hosts: Sequence[str] = LOOPBACK,
    upload_limit: int = UPLOAD_LIMIT,
    script_hashes: Callable[[], Sequence[str]] = tuple,
) -> None:
    """Put the guards before every request and the headers on every answer.

    Parameters
    ----------
    port : int or None
        Port that the host must name; None where it is not known, for any.
    hosts : sequence of str
        Names under which the server may be asked; an IPv6 address in brackets.
    upload_limit : int
        Bytes that a request may bring.
    script_hashes : callable
        Returns the hashes of the scripts that stand inside our own pages; `Dash.csp_hashes`.
    """
    server.config["MAX_CONTENT_LENGTH"] = upload_limit
    allowed = frozenset(host.lower() for host in hosts)

    def guard() -> Refusal | None:
        return _foreign_host(allowed, port) or _foreign_page() or _too_large(upload_limit)

    def add_headers(response: Response) -> Response:
        is_page = response.mimetype == "text/html"
        response.headers["Content-Security-Policy"] = content_policy(script_hashes() if is_page else ())
        for name, value in HEADERS.items():
            response.headers[name] = value
        if not request.path.startswith(LASTING_PATHS):
            response.headers.setdefault("Cache-Control", "no-store")
        return response

    def too_large(_error: RequestEntityTooLarge) -> Refusal:
        return _refusal(_limit_message(upload_limit), 413)

    # Before anything that others, Dash among them, have asked for.
    server.before_request_funcs.setdefault(None, []).insert(0, guard)
    server.after_request(add_headers)
    server.register_error_handler(RequestEntityTooLarge, too_large)


def content_policy(hashes: Sequence[str] = ()) -> str:
    """Return the Content-Security-Policy: everything from this server, no script inside a page but the given ones.

    Styles may stand inside a page, since the grid and the graph drawing set them there; workers may come from a blob,
    since the map's edges are drawn in one.
    """
    rules = {
        "default-src": ["'self'"],
        "script-src": ["'self'", *hashes],
        "style-src": ["'self'", "'unsafe-inline'"],
        "img-src": ["'self'", "data:", "blob:"],
        "font-src": ["'self'", "data:"],
        "connect-src": ["'self'"],
        "worker-src": ["'self'", "blob:"],
        "object-src": ["'none'"],
        "base-uri": ["'none'"],
        "form-action": ["'self'"],
        "frame-ancestors": ["'none'"],
    }
    return "; ".join(" ".join([name, *sources]) for name, sources in rules.items())


def _foreign_host(allowed: frozenset[str], port: int | None) -> Refusal | None:
    """Refuse a name that is not ours: one that another site has made to point to this machine."""
    named = request.environ.get("HTTP_HOST", "").lower()
    match = HOST_AND_PORT.fullmatch(named)
    if match and match[1] in allowed and (port is None or int(match[2] or 80) == port):
        return None
    return _refusal("corymb does not answer under this host name; open it at the address that it printed", 403)


def _foreign_page() -> Refusal | None:
    """Refuse what another site's page sends, and what it tries to read; it may link here."""
    if request.method not in READING:
        origin = urlsplit(request.headers.get("Origin", ""))
        if origin.scheme not in {"http", "https"} or origin.netloc.lower() != request.environ["HTTP_HOST"].lower():
            return _refusal("corymb takes changes from its own pages only", 403)
    elif request.headers.get("Sec-Fetch-Site") in FOREIGN_SITES and request.headers.get("Sec-Fetch-Mode") != "navigate":
        return _refusal("corymb shows its data to its own pages only", 403)
    return None


def _too_large(limit: int) -> Refusal | None:
    """Refuse by the announced length, before anything is read.

    A body without one, which only some servers let through, would be cut at the limit without a word, so it is refused.
    """
    length = request.content_length
    if length is None:
        hidden = request.environ.get("wsgi.input_terminated") and request.method not in READING
        return _refusal("corymb needs to know how long a request is", 411) if hidden else None
    return _refusal(_limit_message(limit), 413) if length > limit else None


def _limit_message(limit: int) -> str:
    return (
        f"the file is larger than the {limit / MEGABYTE:g} MB that the dashboard takes; compress it with gzip, or "
        "name it to `corymb open` in the terminal"
    )


def _refusal(message: str, status: int) -> Refusal:
    return message, status, {"Content-Type": "text/plain; charset=utf-8"}
