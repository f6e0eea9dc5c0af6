"""The real dashboard in a process of its own, as `corymb open` starts it; for browser tests and for the screenshot."""

from __future__ import annotations

import contextlib
import os
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path

TOP = Path(__file__).resolve().parents[1]
STARTS_WITHIN_SECONDS = 60.0
ENDS_WITHIN_SECONDS = 10.0


@contextlib.contextmanager
def served(workspace: Path, *arguments: str) -> Iterator[str]:
    """Serve the dashboard until the block ends; yields its address.

    Parameters
    ----------
    workspace : Path
        An empty folder, or one that an earlier dashboard left.
    *arguments : str
        Further arguments of `corymb open`, such as the file of a network; the sample network is shown without.
    """
    port = free_port()
    command = [sys.executable, "-m", "app.cli", "open", *arguments]
    command += ["--no-browser", "--port", str(port), "--workspace", str(workspace)]
    environment = {**os.environ, "PYTHONPATH": str(TOP), "CORYMB_DEBUG": "1"}
    address = f"http://127.0.0.1:{port}/"
    process = subprocess.Popen(command, cwd=TOP, env=environment, stdin=subprocess.DEVNULL)
    try:
        _await(address, process)
        yield address
    finally:
        process.terminate()
        try:
            process.wait(ENDS_WITHIN_SECONDS)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()


def free_port() -> int:
    """Return a port of this machine that nobody uses now."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def _await(address: str, process: subprocess.Popen[bytes]) -> None:
    """Return once the server answers; raise where it ended or takes too long."""
    end = time.monotonic() + STARTS_WITHIN_SECONDS
    while time.monotonic() < end:
        if process.poll() is not None:
            raise RuntimeError(f"the dashboard ended with status {process.returncode} before it answered")
        with contextlib.suppress(urllib.error.URLError, OSError), urllib.request.urlopen(address, timeout=5):
            return
        time.sleep(0.1)
    raise RuntimeError(f"the dashboard did not answer within {STARTS_WITHIN_SECONDS:.0f} s")
