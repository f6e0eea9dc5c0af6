"""Builds the web application and serves it on this machine."""

from __future__ import annotations

import contextlib
import logging
import socket
import threading
import webbrowser
from pathlib import Path
from typing import Any

from dash import Dash, set_props
from flask import Flask

from analysis.compute import Compute
from analysis.errors import CorymbError, SettingError
from app.desk import Desk
from app.frame import layout
from app.guards import install_guards
from app.jobs import FAULT, Jobs
from app.places import assets_folder
from app.routes import install_routes
from app.wiring import wire
from app.workspace import Workspace

HOST = "127.0.0.1"
FIRST_PORT, LAST_PORT = 8050, 8099
THREADS = 8
OPEN_BROWSER_AFTER_SECONDS = 0.6
logger = logging.getLogger(__name__)


def create_app(desk: Desk, *, port: int | None = None) -> Dash:
    """Build the dashboard on a desk; importing this module builds nothing.

    Parameters
    ----------
    port : int or None
        Where it will be served; requests for another host or port are refused. None for tests without a socket.
    """
    server = Flask("corymb")
    app = Dash(
        "corymb",
        server=server,
        title="corymb",
        update_title="",
        assets_folder=str(assets_folder()),
        assets_ignore=r".*(README|LICENSE|licences).*|map_page.*",
        serve_locally=True,
        suppress_callback_exceptions=True,
        compress=False,
        on_error=_tell_fault,
    )
    app.index_string = app.index_string.replace("<html>", '<html lang="en-GB">')
    app.layout = layout(app.get_asset_url("corymb.svg"))
    install_routes(server, desk)
    wire(app, desk)
    install_guards(server, port=port, script_hashes=app.csp_hashes)
    return app


def _tell_fault(error: Exception) -> None:
    """Show an error beside the thing that caused it; one that is a fault of ours goes to the log, whole."""
    if not isinstance(error, CorymbError):
        logger.error("a fault in a callback", exc_info=error)
    set_props("fault", {"data": str(error) if isinstance(error, CorymbError) else FAULT})


def serve(
    network: Path | None,
    port: int | None,
    browser: bool,
    workspace: Path | None,
    compute: str | None,
) -> int:
    """Open the dashboard and serve it until interrupted; return the exit status.

    Raises
    ------
    CorymbError
        Where the network cannot be read, the port is taken or the workspace cannot be opened.
    """
    from waitress import create_server

    port = _free_port(port)
    with Workspace.open(workspace) as kept:
        long = _cluster(compute) if compute else None
        jobs = Jobs(kept, long=long)
        try:
            desk = Desk(kept, jobs)
            if network is not None:
                kept.remember("network at hand", desk.open_path(network))
            app = create_app(desk, port=port)
            web: Any = create_server(app.server, host=HOST, port=port, threads=THREADS, ident=None)
            address = f"http://{HOST}:{port}/"
            _say(f"corymb is at {address} (Ctrl C ends it); the workspace is {kept.folder}")
            if browser:
                threading.Timer(OPEN_BROWSER_AFTER_SECONDS, webbrowser.open, [address]).start()
            with contextlib.suppress(KeyboardInterrupt):
                web.run()
            web.close()
        finally:
            jobs.close()
    return 0


def _cluster(address: str) -> Compute:
    from analysis.compute_dask import DaskCluster

    cluster: Compute = DaskCluster(address)
    return cluster


def _free_port(wanted: int | None) -> int:
    """Return the wanted port, or the first free one of a small range."""
    candidates = [wanted] if wanted else range(FIRST_PORT, LAST_PORT + 1)
    for candidate in candidates:
        with socket.socket() as probe:
            probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            try:
                probe.bind((HOST, candidate))
            except OSError:
                continue
            return candidate
    place = f"port {wanted} is" if wanted else f"ports {FIRST_PORT} to {LAST_PORT} are all"
    raise SettingError(f"{place} taken; end the other program, or choose a port with --port")


def _say(text: str) -> None:
    """Tell the terminal."""
    import sys

    sys.stdout.write(text + "\n")
    sys.stdout.flush()
