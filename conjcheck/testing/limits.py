"""A time limit for single calls of a rule, cheap enough to be set a million times a second.

A ticking alarm looks at ``limit.started`` a few times a second and interrupts the call that has run for too long. In the main
thread of a POSIX system the alarm is a signal, which also ends a sleep; elsewhere a second thread raises the interruption at the
next byte code. Neither can end a call that stays inside C code.

``os._exit`` raises ``SystemExit`` meanwhile, so that a rule does not end a run as if nothing had been wrong; not in a process that may die.
"""

import ctypes
import os
import signal
import threading
import time
from collections.abc import Callable
from types import FrameType, TracebackType
from typing import NoReturn

__all__ = ["CallInterrupted", "CallLimit", "let_exit"]

_TICK = 0.1


_may_exit = False


def let_exit() -> None:
    """Say that this process may be ended by a rule: somebody is watching it."""
    global _may_exit  # noqa: PLW0603
    _may_exit = True


class CallInterrupted(BaseException):
    """Raised inside a rule that ran for too long; not an ``Exception``, so that a rule does not catch it by accident."""


class CallLimit:
    """Context manager, also inside itself. Set ``started = time.perf_counter()`` before a call and ``started = 0.0`` after it.

    Args:
        seconds: how long one call may take.
        on_tick: called a few times a second by the alarm (with the signal, not with the thread), while no call is inside C code, and none
            is over its limit: a rule that swallows the interruption falls silent.
    """

    __slots__ = ("_before", "_depth", "_done", "_exit", "_target", "_thread", "on_tick", "seconds", "started")

    def __init__(self, seconds: float, on_tick: Callable[[], None] | None = None) -> None:
        self.seconds = seconds
        self.on_tick = on_tick
        self.started = 0.0
        self._depth = 0

    def __enter__(self) -> "CallLimit":
        self._depth += 1
        if self._depth > 1:
            return self
        self.started = 0.0
        self._exit = os._exit
        if not _may_exit:
            os._exit = _exit_of(os.getpid(), os._exit)  # type: ignore[assignment]  # the same but for the name of its argument
        self._thread: threading.Thread | None = None
        if hasattr(signal, "setitimer") and threading.current_thread() is threading.main_thread():
            self._before = signal.signal(signal.SIGALRM, self._alarm), signal.setitimer(signal.ITIMER_REAL, _TICK, _TICK)
        else:
            self._done = threading.Event()
            self._target = threading.get_ident()
            self._thread = threading.Thread(target=self._watch, daemon=True)
            self._thread.start()
        return self

    def __exit__(self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None) -> None:
        self._depth -= 1
        if self._depth:
            return
        self.started = 0.0
        os._exit = self._exit
        if self._thread is not None:
            self._done.set()
            self._thread.join()
            return
        handler, timer = self._before
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, handler)
        if timer[0]:
            signal.setitimer(signal.ITIMER_REAL, *timer)

    def _expired(self) -> bool:
        return bool(self.started) and time.perf_counter() - self.started > self.seconds

    def _alarm(self, signum: int, frame: FrameType | None) -> None:
        if self._expired():
            raise CallInterrupted
        if self.on_tick is not None:
            self.on_tick()

    def _watch(self) -> None:
        while not self._done.wait(_TICK):
            if self._expired():
                ctypes.pythonapi.PyThreadState_SetAsyncExc(ctypes.c_ulong(self._target), ctypes.py_object(CallInterrupted))


def _exit_of(process: int, real: Callable[[int], NoReturn]) -> Callable[[int], NoReturn]:
    """What stands for ``os._exit`` in one process; copies of it (of a rule that forks) end as always."""

    def leave(status: int) -> NoReturn:
        if os.getpid() != process:
            real(status)
        raise SystemExit(f"os._exit({status}) was called")

    return leave
