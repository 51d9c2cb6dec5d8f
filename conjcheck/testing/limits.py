"""A time limit for single calls of a rule, cheap enough to be set a million times a second.

A ticking alarm looks at ``limit.started`` a few times a second and interrupts the call that has run for too long. In the main
thread of a POSIX system the alarm is a signal, which also ends a sleep; elsewhere a second thread raises the interruption at the
next byte code. Neither can end a call that stays inside C code.
"""

import ctypes
import signal
import threading
import time
from collections.abc import Callable
from types import FrameType, TracebackType

__all__ = ["CallInterrupted", "CallLimit"]

_TICK = 0.1


class CallInterrupted(BaseException):
    """Raised inside a rule that ran for too long; not an ``Exception``, so that a rule does not catch it by accident."""


class CallLimit:
    """Context manager, also inside itself. Set ``started = time.perf_counter()`` before a call and ``started = 0.0`` after it.

    Args:
        seconds: how long one call may take.
        on_tick: called a few times a second by the alarm (with the signal, not with the thread), while no call is inside C code, and none
            is over its limit: a rule that swallows the interruption falls silent.
    """

    __slots__ = ("_before", "_depth", "_done", "_target", "_thread", "on_tick", "seconds", "started")

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
