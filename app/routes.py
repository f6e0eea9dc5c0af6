"""Routes beside Dash: binary arrays for the map, uploads, downloads."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from flask import Flask, Response, abort, jsonify, request

from analysis.errors import CorymbError
from analysis.network import Network
from app.desk import Desk
from app.workspace import WorkspaceError

DRAWING_TIMEOUT_SECONDS = 600.0


def install_routes(server: Flask, desk: Desk) -> None:
    """Add the routes to the server."""
    rules = {**_network_rules(desk), **_study_rules(desk)}
    for rule, view in rules.items():
        server.add_url_rule(rule, f"corymb-{view.__name__}", view)
    server.add_url_rule("/upload", "corymb-upload", _upload(desk), methods=["POST"])
    server.add_url_rule("/handover/<study_id>.zip", "corymb-handover", _handover(desk))


def _network_rules(desk: Desk) -> dict[str, Callable[..., Response]]:
    def network_or_404(fingerprint: str) -> Network:
        try:
            return desk.network(fingerprint)
        except WorkspaceError:
            abort(404)

    def positions(fingerprint: str) -> Response:
        network_or_404(fingerprint)
        desk.jobs.wait(desk.start_drawing(fingerprint), DRAWING_TIMEOUT_SECONDS)
        drawing = desk.drawing(fingerprint)
        return _bytes(None if drawing is None else drawing[0].astype("<f4").tobytes())

    def edges(fingerprint: str) -> Response:
        network = network_or_404(fingerprint)
        return _bytes(np.column_stack([network.sources, network.targets]).astype("<u4").tobytes())

    def degrees(fingerprint: str) -> Response:
        return _bytes(network_or_404(fingerprint).degree.astype("<u4").tobytes())

    def names(fingerprint: str) -> Response:
        return jsonify(list(network_or_404(fingerprint).names))

    def ruler(fingerprint: str, quality: str, position: int) -> Response:
        return _bytes(desk.ruler_colours(fingerprint, quality, position))

    def anchor(fingerprint: str) -> Response:
        return _bytes(desk.anchor_colours(fingerprint))

    return {
        "/data/<fingerprint>/anchor": anchor,
        "/data/<fingerprint>/positions": positions,
        "/data/<fingerprint>/edges": edges,
        "/data/<fingerprint>/degrees": degrees,
        "/data/<fingerprint>/names": names,
        "/data/<fingerprint>/ruler/<quality>/<int:position>": ruler,
    }


def _study_rules(desk: Desk) -> dict[str, Callable[..., Response]]:
    def study(study_id: str) -> Response:
        return _bytes(desk.study_colours(study_id))

    def confidence(study_id: str) -> Response:
        found = desk.study(study_id)
        return _bytes(None if found is None else _confidence(found).astype("<f4").tobytes())

    def given_names(study_id: str) -> Response:
        return jsonify(desk.workspace.names(study_id))

    return {
        "/data/study/<study_id>": study,
        "/data/study/<study_id>/confidence": confidence,
        "/data/study/<study_id>/names": given_names,
    }


def _upload(desk: Desk) -> Callable[[], Any]:
    def upload() -> Any:
        sent = request.files.get("file")
        if sent is None or not sent.filename:
            return jsonify({"fault": "No file came with the request; choose one and try again."}), 400
        kind = request.form.get("kind", "network")
        try:
            if kind != "network":
                return jsonify({"kind": kind, "file": desk.meaning.keep(kind, sent.read(), sent.filename)})
            fingerprint = desk.open_bytes(sent.read(), sent.filename)
        except CorymbError as error:
            return jsonify({"fault": str(error)})
        return jsonify({"fingerprint": fingerprint})

    return upload


def _handover(desk: Desk) -> Callable[[str], Any]:
    def handover(study_id: str) -> Any:
        packed = desk.packed(study_id)
        if packed is None:
            abort(404)
        name, content = packed
        answer = Response(content, mimetype="application/zip")
        answer.headers["Content-Disposition"] = f'attachment; filename="{name}"'
        return answer

    return handover


def _confidence(study: Any) -> Any:
    """Return the confidence of each node in its first module, NaN where unknown, shape (nodes,)."""
    values = np.full(study.network.node_count, np.nan)
    table = study.membership
    nodes = np.array([study.network.index[gene] for gene in table["gene"]], np.int64)
    values[nodes[::-1]] = table["confidence"].to_numpy(np.float64)[::-1]
    return values


def _bytes(content: bytes | None) -> Response:
    if content is None:
        abort(404)
    return Response(content, mimetype="application/octet-stream")
