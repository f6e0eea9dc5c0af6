"""The guards, on a real Dash application through its real request handling."""

from __future__ import annotations

import base64
import hashlib
import http.client
import io
import threading
from html.parser import HTMLParser

import pytest
from dash import Dash, Input, Output, dcc, html
from flask import Flask, Response, request
from flask.testing import FlaskClient
from waitress import create_server

from app.guards import install_guards

PORT = 8050
HERE = "127.0.0.1:8050"
OWN = {"Host": HERE, "Origin": f"http://{HERE}"}


@pytest.fixture(scope="module")
def client() -> FlaskClient:
    app = Dash("guarded")
    app.layout = html.Div([dcc.Input(id="typed", value="x"), html.Div(id="server"), html.Div(id="browser")])

    @app.callback(Output("server", "children"), Input("typed", "value"))
    def answer(typed: str) -> str:
        return f"server {typed}"

    app.clientside_callback(
        "function (typed) { return typed; }", Output("browser", "children"), Input("typed", "value")
    )

    @app.server.post("/upload")
    def upload() -> str:
        return str(len(request.files["file"].read()))

    @app.server.post("/raw")
    def raw() -> str:
        return str(len(request.get_data()))

    @app.server.get("/positions")
    def positions() -> Response:
        return Response(b"\0\1", mimetype="application/octet-stream")

    @app.server.get("/forever")
    def forever() -> Response:
        return Response(b"\0", headers={"Cache-Control": "private, max-age=31536000, immutable"})

    install_guards(app.server, port=PORT, upload_limit=50_000, script_hashes=app.csp_hashes)
    return app.server.test_client()


def callback_body() -> dict[str, object]:
    return {
        "output": "server.children",
        "outputs": {"id": "server", "property": "children"},
        "inputs": [{"id": "typed", "property": "value", "value": "moss"}],
        "changedPropIds": ["typed.value"],
    }


@pytest.mark.parametrize("host", ["127.0.0.1:8050", "localhost:8050", "LOCALHOST:8050", "[::1]:8050"])
def test_own_names_are_answered(client: FlaskClient, host: str):
    assert client.get("/", headers={"Host": host}).status_code == 200


@pytest.mark.parametrize(
    "host",
    [
        "moss.example:8050",
        "127.0.0.1.moss.example:8050",
        "localhost:8051",
        "localhost",
        "localhost:8050:8050",
        "localhost:8050@moss.example",
        "localhost:",
        "[::1",
        "",
    ],
)
def test_other_names_are_refused(client: FlaskClient, host: str):
    for path in ("/", "/positions", "/_dash-layout"):
        answer = client.get(path, headers={"Host": host})
        assert answer.status_code == 403
        assert answer.mimetype == "text/plain"
        assert "host name" in answer.text


def test_a_callback_from_the_own_page_works(client: FlaskClient):
    answer = client.post("/_dash-update-component", json=callback_body(), headers=OWN)
    assert answer.status_code == 200
    assert answer.get_json()["response"] == {"server": {"children": "server moss"}}


@pytest.mark.parametrize(
    "origin",
    [
        None,
        "null",
        "https://moss.example",
        "http://localhost:8050",  # another origin than 127.0.0.1, though the same machine
        "http://127.0.0.1:9000",
        f"ftp://{HERE}",
        f"http://{HERE}.moss.example",
        HERE,
    ],
)
@pytest.mark.parametrize("method", ["post", "put", "delete", "patch"])
def test_changes_from_elsewhere_are_refused(client: FlaskClient, origin: str | None, method: str):
    headers = {"Host": HERE} if origin is None else {"Host": HERE, "Origin": origin}
    answer = getattr(client, method)("/_dash-update-component", json=callback_body(), headers=headers)
    assert answer.status_code == 403
    assert "own pages" in answer.text


def test_other_sites_may_link_but_not_read(client: FlaskClient):
    for site in ("cross-site", "same-site"):
        read = {"Host": HERE, "Sec-Fetch-Site": site, "Sec-Fetch-Mode": "no-cors"}
        assert client.get("/positions", headers=read).status_code == 403
        assert client.get("/", headers=read | {"Sec-Fetch-Mode": "navigate"}).status_code == 200
    own = {"Host": HERE, "Sec-Fetch-Site": "same-origin", "Sec-Fetch-Mode": "cors"}
    assert client.get("/positions", headers=own).status_code == 200


def test_uploads_have_a_limit(client: FlaskClient):
    small = client.post("/upload", data={"file": (io.BytesIO(b"x" * 40_000), "a.tsv")}, headers=OWN)
    assert small.text == "40000"
    large = client.post("/upload", data={"file": (io.BytesIO(b"x" * 60_000), "a.tsv")}, headers=OWN)
    assert large.status_code == 413
    assert "0.05 MB" in large.text
    assert large.mimetype == "text/plain"


def test_a_body_that_hides_its_length_is_refused(client: FlaskClient):
    answer = client.post(
        "/raw",
        headers=OWN,
        input_stream=io.BytesIO(b"x" * 60_000),
        environ_overrides={"wsgi.input_terminated": True, "HTTP_TRANSFER_ENCODING": "chunked"},
    )
    assert answer.status_code == 411


def test_a_body_in_chunks_has_the_limit_on_the_real_server(client: FlaskClient):
    served = create_server(client.application, host="127.0.0.1", port=0, threads=1)
    thread = threading.Thread(target=served.run, daemon=True)
    thread.start()
    connection = http.client.HTTPConnection("127.0.0.1", served.effective_port, timeout=10)
    try:
        for size, status in ((40_000, 200), (60_000, 413)):
            chunks = (b"x" * 10_000 for _ in range(size // 10_000))
            connection.request("POST", "/raw", chunks, OWN, encode_chunked=True)
            answer = connection.getresponse()
            assert answer.status == status
            answer.read()
    finally:
        connection.close()
        served.trigger.pull_trigger(served.close)  # in the server's own thread
        thread.join(5)
        served.task_dispatcher.shutdown()
    assert not thread.is_alive()


def test_every_answer_has_the_headers(client: FlaskClient):
    answers = [
        client.get("/", headers={"Host": HERE}),
        client.get("/positions", headers={"Host": HERE}),
        client.get("/no-such-page.html", headers={"Host": HERE}),
        client.get("/", headers={"Host": "moss.example"}),
        client.post("/upload", headers=OWN, data={"file": (io.BytesIO(b"x" * 60_000), "a.tsv")}),
    ]
    for answer in answers:
        assert answer.headers["X-Content-Type-Options"] == "nosniff"
        assert answer.headers["X-Frame-Options"] == "DENY"
        assert answer.headers["Referrer-Policy"] == "same-origin"
        assert answer.headers["Cross-Origin-Resource-Policy"] == "same-origin"
        policy = policy_of(answer)
        assert policy["default-src"] == ["'self'"]
        assert policy["worker-src"] == ["'self'", "blob:"]
        assert policy["frame-ancestors"] == ["'none'"]
        assert "'unsafe-inline'" not in policy["script-src"]
        assert "'unsafe-eval'" not in policy["script-src"]
        allowed = {"'self'", "'none'", "'unsafe-inline'", "data:", "blob:"}
        assert all(source in allowed or source.startswith("'sha256-") for rule in policy.values() for source in rule)


def policy_of(answer: Response) -> dict[str, list[str]]:
    rules = answer.headers["Content-Security-Policy"].split("; ")
    return {name: sources for name, *sources in (rule.split(" ") for rule in rules)}


class InlineScripts(HTMLParser):
    """Collects the text of the scripts that stand inside a page and would be executed."""

    def __init__(self):
        super().__init__()
        self.found: list[str] = []
        self._inside = False

    def handle_starttag(self, tag, attrs):
        kinds = dict(attrs)
        executed = kinds.get("type") in (None, "application/javascript", "text/javascript", "module")
        self._inside = tag == "script" and "src" not in kinds and executed
        if self._inside:
            self.found.append("")

    def handle_endtag(self, tag):
        self._inside = self._inside and tag != "script"

    def handle_data(self, data):
        if self._inside:
            self.found[-1] += data


def test_the_policy_admits_the_page_s_own_scripts_and_no_other(client: FlaskClient):
    answer = client.get("/", headers={"Host": HERE})
    scripts = InlineScripts()
    scripts.feed(answer.text)
    # Content Security Policy Level 3, "Does element match source list": base64 of the SHA-256 of the script's text.
    digests = [base64.b64encode(hashlib.sha256(script.encode()).digest()).decode() for script in scripts.found]
    assert len(digests) >= 2  # Dash's own first line, and the callback that runs in the browser
    assert {f"'sha256-{digest}'" for digest in digests} == set(policy_of(answer)["script-src"]) - {"'self'"}


def test_data_are_not_kept_by_the_browser_unless_their_route_says_so(client: FlaskClient):
    def kept(path: str) -> str | None:
        return client.get(path, headers={"Host": HERE}).headers.get("Cache-Control")

    assert kept("/positions") == "no-store"
    assert kept("/") == "no-store"
    assert kept("/_dash-layout") == "no-store"
    assert kept("/forever") == "private, max-age=31536000, immutable"


def test_other_hosts_and_any_port_where_asked():
    server = Flask("plain")
    server.add_url_rule("/", view_func=lambda: "yes")
    install_guards(server, port=None, hosts=("moss.example",))
    client = server.test_client()
    assert client.get("/", headers={"Host": "moss.example:1234"}).text == "yes"
    assert client.get("/", headers={"Host": "moss.example"}).text == "yes"
    assert client.get("/", headers={"Host": "localhost"}).status_code == 403


def test_port_80_goes_without_saying():
    server = Flask("plain")
    server.add_url_rule("/", view_func=lambda: "yes")
    install_guards(server, port=80)
    assert server.test_client().get("/", headers={"Host": "localhost"}).text == "yes"
