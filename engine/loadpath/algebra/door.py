"""The door to the worker process that holds SymPy: started when first needed, reused, ended on time-out."""

from __future__ import annotations

import atexit
import json
import os
import subprocess
import sys
from pathlib import Path
from queue import Empty, SimpleQueue
from threading import Lock, Thread
from typing import Any

from loadpath.algebra.failure import NoForm, clock_stopped, no_start, remaining, timed_out, too_large


class Worker:
    """One worker process and the thread that reads its answers."""

    def __init__(self) -> None:
        self.owner = os.getpid()
        self.process = subprocess.Popen(
            [sys.executable, "-P", "-m", "loadpath.algebra.worker"],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env=_environment(),
        )
        self._answers: SimpleQueue[bytes] = SimpleQueue()
        Thread(target=self._listen, daemon=True).start()

    def _listen(self) -> None:
        assert self.process.stdout is not None
        for line in self.process.stdout:
            self._answers.put(line)
        self._answers.put(b"")

    def ask(self, request: bytes, seconds: float) -> bytes | None:
        """The answer, b"" where the process ended, None where the time was up."""
        assert self.process.stdin is not None
        try:
            self.process.stdin.write(request)
            self.process.stdin.flush()
        except OSError:
            return b""
        try:
            return self._answers.get(timeout=seconds)
        except Empty:
            return None

    def end(self) -> None:
        """Ends the process at once."""
        if self.owner == os.getpid():
            self.process.kill()
            self.process.wait()


def _environment() -> dict[str, str]:
    """This process's, with its import path, and one hash seed for all."""
    package = str(Path(__file__).parents[2])
    # an empty entry is the working folder, where a stranger's files may lie
    path = dict.fromkeys([package, *(entry for entry in sys.path if entry)])
    return {**os.environ, "PYTHONPATH": os.pathsep.join(path), "PYTHONHASHSEED": "0"}


_lock = Lock()
_worker: Worker | None = None


START_LIMIT = 60.0
"""Seconds that loading SymPy may take."""


def _started() -> Worker:
    """A worker that has SymPy loaded. Raises AlgebraFailure where it does not start."""
    with clock_stopped():
        worker = Worker()
        if not worker.ask(_request("ready", 0), START_LIMIT):
            worker.end()
            raise no_start()
    return worker


def _request(work: str, seconds: float, **arguments: Any) -> bytes:
    return json.dumps({"work": work, "seconds": seconds, **arguments}).encode() + b"\n"


def ask(work: str, **arguments: Any) -> Any:
    """What the worker answers; None where it found no closed form.

    Raises AlgebraFailure where the time is up or the expression is too large for it.
    """
    global _worker
    with _lock:
        fresh = _worker is None or _worker.owner != os.getpid()
        for _ in range(2):
            if _worker is None or _worker.owner != os.getpid():
                _worker = _started()
                fresh = True
            try:
                answer = _worker.ask(_request(work, remaining(), **arguments), remaining())
            except BaseException:
                # an answer that comes late must not be taken for that to the next question
                _worker.end()
                _worker = None
                raise
            if answer or answer is None or fresh:
                break
            # it had ended since it was last used
            _worker.end()
            _worker = None
        if not answer:
            assert _worker is not None
            _worker.end()
            _worker = None
    if answer is None:
        raise timed_out()
    if not answer:
        remaining()
        raise too_large("the expression is too large for the algebra")
    reply = json.loads(answer)
    if reply["fault"] == "too-large":
        raise too_large("the derived expression is too large")
    if reply["fault"]:
        raise NoForm
    return reply["answer"]


def close() -> None:
    """Ends the worker; the next call starts another."""
    global _worker
    with _lock:
        if _worker is not None:
            _worker.end()
        _worker = None


def worker_id() -> int | None:
    """Process id of the worker that waits for the next call."""
    return _worker.process.pid if _worker is not None else None


atexit.register(close)
