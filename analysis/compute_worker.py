"""Body of a worker process, and how errors travel back from it."""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
import threading
import traceback
from multiprocessing import connection
from multiprocessing.reduction import ForkingPickler
from pathlib import Path
from typing import Any

from analysis.errors import ComputeError, CorymbError
from analysis.network import Network
from analysis.network_files import load_network

READY = "ready"
OUT_OF_MEMORY = "a worker ran out of memory: close other programs, or work on a smaller network (a higher --min-weight)"


def work(pipe: connection.Connection) -> None:
    """Take tasks until the pipe closes; end at once when the parent does.

    An interrupt from the keyboard reaches the whole group of processes; the parent alone answers it.
    """
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    _end_with_parent()
    try:
        pipe.send(READY)
        _serve(pipe)
    except (EOFError, ConnectionError):
        return


def portable(error: Exception) -> Exception:
    """Return an error as it can travel between processes.

    That is the error itself, with the worker's traceback as a note where the fault is ours; a `ComputeError` with its
    words where its class cannot be pickled and read again.
    """
    if isinstance(error, MemoryError):
        return ComputeError(OUT_OF_MEMORY)
    if not isinstance(error, CorymbError):
        error.add_note("In the worker:\n" + "".join(traceback.format_exception(error)))
    try:
        again = ForkingPickler.loads(ForkingPickler.dumps(error))
    except Exception:  # noqa: BLE001 - whatever a foreign class does when it is pickled, the answer is the same
        again = None
    if type(again) is type(error):
        return error
    return ComputeError(f"a task failed with {type(error).__name__}: {error}")


def _serve(pipe: connection.Connection) -> None:
    network: Network | None = None
    at_hand = ""
    while True:
        position, source, task = pipe.recv()
        try:
            if network is None or source != at_hand:
                network, at_hand = load_network(Path(source)), source
            answer = _answer(position, None, task.run(network))
        except Exception as error:  # noqa: BLE001 - a fault in a task is raised again, whole, in the parent
            answer = _answer(position, portable(error), None)
        pipe.send_bytes(answer)


def _answer(position: int, failure: Exception | None, result: Any) -> memoryview:
    """Pickle an answer before any of it is sent, so that a result that cannot be pickled is an error like others."""
    answer: memoryview = ForkingPickler.dumps((position, failure, result))
    return answer


def _end_with_parent() -> None:
    """Arrange for this process to end when its parent does, however the parent ends.

    A thread waits for the parent. It cannot act while a compiled library holds the interpreter lock, so on Linux the
    kernel is asked as well: a signal when the pipe from the parent breaks, whose default is to end the process.
    """
    parent = multiprocessing.parent_process()
    if parent is None:
        return
    threading.Thread(target=_wait_for_end, args=(parent,), daemon=True).start()
    if sys.platform == "linux":
        import fcntl

        fcntl.fcntl(parent.sentinel, fcntl.F_SETOWN, os.getpid())
        flags = fcntl.fcntl(parent.sentinel, fcntl.F_GETFL)
        fcntl.fcntl(parent.sentinel, fcntl.F_SETFL, flags | os.O_ASYNC)


def _wait_for_end(parent: Any) -> None:
    parent.join()
    os._exit(1)
