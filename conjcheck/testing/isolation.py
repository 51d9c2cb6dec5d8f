"""A rule called in a process of its own: what hangs, exits, is killed or eats memory becomes a finding with its case.

:func:`isolated` is what any ``concurrent.futures.Executor`` is given to do, on this machine or on another: each thread that calls it
keeps one process (``conjcheck.testing.worker``). Only lines of JSON pass between them.
"""

import contextlib
import json
import os
import signal
import subprocess
import sys
import tempfile
import threading
import weakref
from dataclasses import asdict, replace
from pathlib import Path
from queue import Empty, SimpleQueue
from time import monotonic
from typing import Any

from conjcheck.geometry.case import Case, Row, outcomes
from conjcheck.testing.chunks import Chunk, ChunkResult, entry_of, rows_of_chunk
from conjcheck.testing.finding import Finding
from conjcheck.testing.worker import Marks

__all__ = ["close_all", "isolated", "isolated_afresh"]

_GRACE = 10.0
_FROM_OUTSIDE = (1, 2, 9, 15)
"""SIGHUP, SIGINT, SIGKILL, SIGTERM: signals that others send."""
_MOST_DEATHS = 3
"""A chunk whose process dies this often, each time in a row that is innocent when compared alone, is given up."""


class _Died(Exception):
    """The process ended in the middle of a chunk: how, where it was (``Marks``), and whether somebody else may have ended it."""

    def __init__(self, how: str, row: int, outcome: int, *, slow: bool, outside: bool) -> None:
        super().__init__(how)
        self.how, self.row, self.outcome, self.slow, self.outside = how, row, outcome, slow, outside


class _Closed(Exception):
    """The process was ended by :func:`close_all`."""


class _Full(Exception):
    """The process ran short of memory, but it had compared other chunks before."""


class _Process:
    """One worker process and the file of its marks."""

    def __init__(self) -> None:
        handle, name = tempfile.mkstemp(prefix="conjcheck-")
        os.write(handle, b"\0" * Marks.SIZE)
        os.close(handle)
        self._path = Path(name)
        self._marks = Marks(self._path)
        self._child = subprocess.Popen(  # noqa: S603  # ourselves
            [sys.executable, "-P", "-m", "conjcheck.testing.worker", name, str(os.getpid())],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            start_new_session=True,  # Ctrl-C is for whoever runs the survey
            env={**os.environ, "PYTHONPATH": os.pathsep.join(map(os.path.abspath, sys.path))},  # the modules that are found here
        )
        self._lines: SimpleQueue[bytes] = SimpleQueue()
        threading.Thread(target=_read, args=(self._child, self._lines), daemon=True).start()
        self._task = 0
        self.unseen: list[str] = []
        self.close = weakref.finalize(self, _end, self._child, self._path)

    @property
    def pid(self) -> int:
        """The process."""
        return self._child.pid

    @property
    def lives(self) -> bool:
        """Whether it may be given a chunk."""
        return self.close.alive and self._child.poll() is None

    def run(self, chunk: Chunk, *, careful: bool = False, until: int | None = None) -> ChunkResult:
        """Compare a chunk there, see ``worker.run_chunk``.

        Raises:
            _Died: the process did not survive it, or did not answer and was ended.
            _Full: it ran short of memory, and a fresh one may not.
            _Closed: it was ended by :func:`close_all`.
        """
        assert self._child.stdin is not None, "it has a pipe"
        self._marks.clear()
        self._task += 1
        task = {"task": self._task, "chunk": asdict(chunk), "careful": careful, "until": until}
        with contextlib.suppress(OSError, ValueError):  # it is dead, or closed: noticed below
            self._child.stdin.write(json.dumps(task).encode() + b"\n")
            self._child.stdin.flush()
        line, slow = self._answer(chunk.call_limit + _GRACE)
        try:
            answer = json.loads(line)
            if answer["task"] != self._task:
                raise ValueError("an answer to something else")
            result = ChunkResult.parse(answer["result"])
            self.unseen = [str(name) for name in answer["unseen"]]
        except (ValueError, TypeError, KeyError):
            if not self.close.alive:
                raise _Closed from None
            with contextlib.suppress(subprocess.TimeoutExpired):
                self._child.wait(0.5)
            _end_group(self._child)
            _, row, outcome = self._marks.read()
            code = self._child.wait()
            outside = not slow and -code in _FROM_OUTSIDE
            raise _Died(_ending(code, chunk, slow=slow), row, outcome, slow=slow, outside=outside) from None
        if answer["again"]:
            raise _Full
        return result

    def _answer(self, patience: float) -> tuple[bytes, bool]:
        """The next line, nothing if there is none any more; and whether it was ended since its heart had stopped."""
        heard, beat = monotonic(), -1
        while True:
            with contextlib.suppress(Empty):
                return self._lines.get(timeout=0.5), False
            now, _, _ = self._marks.read()
            if now != beat:
                heard, beat = monotonic(), now
            if self._child.poll() is not None:  # a child of its own may hold the pipe open: do not wait for its end
                with contextlib.suppress(Empty):
                    return self._lines.get(timeout=0.5), False
                return b"", False
            if monotonic() - heard > patience:
                return b"", True


def _read(child: subprocess.Popen[bytes], lines: "SimpleQueue[bytes]") -> None:
    """Pass on what a worker process says, line by line; at the end nothing."""
    assert child.stdout is not None, "it has a pipe"
    with child.stdout as answers:
        for line in answers:
            lines.put(line)
    lines.put(b"")


def _end_group(child: subprocess.Popen[bytes]) -> None:
    """Kill a worker process and the children that its rule may have left behind."""
    with contextlib.suppress(OSError, AttributeError):
        os.killpg(child.pid, signal.SIGKILL)
    child.kill()


def _end(child: subprocess.Popen[bytes], path: Path) -> None:
    """End a worker process: nothing that it does is needed any more."""
    _end_group(child)
    child.wait()
    if child.stdin is not None:
        with contextlib.suppress(OSError):
            child.stdin.close()
    path.unlink(missing_ok=True)


def _ending(code: int, chunk: Chunk, *, slow: bool) -> str:
    if slow:
        return f"one call took longer than {chunk.call_limit:g} s and could not be interrupted"
    if code >= 0:
        return f"the process of the rule ended itself, with status {code}"
    name = signal.Signals(-code).name if -code in {*signal.Signals} else f"signal {-code}"
    return f"the process of the rule was ended by {name}" + (" (out of memory?)" if name == "SIGKILL" else "")


_here = threading.local()
_all: "weakref.WeakSet[_Process]" = weakref.WeakSet()
_closed = 0
"""How often ``close_all`` was called: a chunk begun before is not to start a process any more."""


def _process(*, fresh: bool = False) -> _Process:
    """The process of this thread, a new one if that is not alive."""
    if _here.closed != _closed:
        raise _Closed
    old: _Process | None = getattr(_here, "process", None)
    if old is not None and not fresh and old.lives:
        return old
    if old is not None:
        old.close()
    new = _here.process = _Process()
    _all.add(new)
    if _here.closed != _closed:  # meanwhile
        new.close()
    return new


def close_all() -> None:
    """End all worker processes of this process; a chunk in flight is lost."""
    global _closed  # noqa: PLW0603
    _closed += 1
    for process in list(_all):
        process.close()


def isolated(text: str) -> str:
    """Compare a chunk in a process of its own.

    Args:
        text: the chunk, ``Chunk.as_text()``.

    Returns:
        Its ``ChunkResult`` as JSON. A row in which the process dies is compared once more alone, outcome by outcome: if it dies
        again, that is a finding (``crashed`` or ``too-slow``); if not, it was killed from outside and the chunk is run again.
    """
    chunk = Chunk.parse(text)
    _here.closed = _closed
    try:
        total = _survived(chunk)
    except _Closed:
        total = ChunkResult(problem="stopped")
    if not total.problem and not total.covers(chunk.first, chunk.last):
        total = ChunkResult(
            problem=f"{chunk.space}: rows {chunk.first} to {chunk.last} gave {total.seen} rows: a fault of conjcheck"
        )
    return json.dumps(total.as_json())


def isolated_afresh(texts: list[str]) -> list[str]:
    """The same for several chunks, one after the other, in a process that was asked nothing before.

    Returns:
        The results; then, as JSON, the list of files of its repository that the rule has read, but that its hash does not see.
    """
    _here.closed = _closed
    with contextlib.suppress(_Closed):
        _process(fresh=True)
    results = [isolated(text) for text in texts]
    process: _Process | None = getattr(_here, "process", None)
    return [*results, json.dumps(process.unseen if process else [])]


def _survived(chunk: Chunk) -> ChunkResult:
    """The result of a chunk, whatever it does to its process."""
    total, deaths, place, fresh = ChunkResult(), 0, chunk.first, False
    while place < chunk.last and not total.ended and not total.problem:
        try:
            return total + _process(fresh=fresh).run(chunk.part(place, chunk.last))
        except _Full:
            fresh = True
            continue
        except _Died as death:
            row, how = death.row, death.how
        fresh = False
        found = _alone(chunk.part(row, row + 1)) if place <= row < chunk.last else None
        try:
            before = _process().run(chunk.part(place, row)) if found and row > place else ChunkResult()
        except (_Died, _Full):
            found = None
        if found is None:
            deaths += 1
            if deaths == _MOST_DEATHS:
                return total + ChunkResult(
                    problem=f"{chunk.space}: {how}, {deaths} times, but not in a row that was compared alone"
                )
            continue
        total += before
        if not total.ended and not total.problem:
            total += found if chunk.every else replace(found, seen=0, ended=True)
        place = row + 1
    return total


def _alone(chunk: Chunk) -> ChunkResult | None:
    """What a row gives when it is compared alone in a fresh process: a finding if that dies again, ``None`` if the row is innocent.

    An end that may have come from outside must happen twice more at the same place.
    """
    places = set()
    for _ in range(2):
        try:
            _process(fresh=True).run(chunk, careful=True)
        except _Full:
            return None
        except _Died as death:
            again = death
        else:
            return None
        places.add((again.row, again.outcome))
        if again.row == Marks.NOWHERE or len(places) > 1:
            return None
        if not again.outside:
            break
    (row,) = rows_of_chunk(chunk)
    where: Row | Case = row
    earlier: tuple[dict[str, Any], ...] = ()
    if again.outcome:
        w, d = outcomes(row.X, row.u.length + row.v.length, **chunk.rings)[again.outcome - 1]
        where = Case(row.X, row.u, row.v, w, d)
        try:
            earlier = _process().run(chunk, until=again.outcome - 1).findings if again.outcome > 1 else ()
        except (_Died, _Full):
            return None
    finding = Finding("too-slow" if again.slow else "crashed", where, detail=again.how)
    found = (*earlier, entry_of(finding))
    return ChunkResult(seen=1, failing_rows=1, failing=len(found), findings=found if chunk.every else found[:1])
