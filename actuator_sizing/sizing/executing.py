"""Work shared out over any executor of `concurrent.futures`: local processes, threads, or a cluster."""

from __future__ import annotations

import signal
import threading
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, Executor, Future, wait
from itertools import islice
from types import FrameType
from typing import Any, Self, TypeVar

_Task = TypeVar("_Task")
_Result = TypeVar("_Result")

_IN_FLIGHT = 16  # tasks handed over at a time: enough to keep workers busy, few enough to bound the memory


class Interruption:
    """Ctrl-C held back to where the work can stop without losing what is half done; a second one stops at once.

    Parameters
    ----------
    held_back : bool
        Whether to hold it back at all. [-]
    """

    def __init__(self, *, held_back: bool):
        self._held_back = held_back
        self._requested = False
        self._before: Any = None

    def __enter__(self) -> Self:
        if self._held_back and threading.current_thread() is threading.main_thread():
            self._before = signal.signal(signal.SIGINT, self._note)
        return self

    def _note(self, _number: int, _frame: FrameType | None) -> None:
        if self._requested:
            raise KeyboardInterrupt
        self._requested = True

    def raise_if_requested(self) -> None:
        """Stop here, if the user wants to."""
        if self._requested:
            raise KeyboardInterrupt

    def __exit__(self, *_exception: object) -> None:
        if self._before is not None:
            signal.signal(signal.SIGINT, self._before)


def work_through(
    function: Callable[..., _Result],
    tasks: Iterable[tuple[_Task, tuple[Any, ...]]],
    executor: Executor | None,
) -> Iterator[tuple[_Task, _Result]]:
    """Call a function for every task, here or by an executor, and give each result when it is there.

    Parameters
    ----------
    function : callable
        What to do; its arguments and its result must be plain data where they travel. [-]
    tasks : iterable of (task, arguments)
        Made when there is a place for them, so that they may depend on results that came before. [-]
    executor : Executor or None
        None: here, one after the other. [-]

    Yields
    ------
    task, result
        In the order in which they are ready.

    Notes
    -----
    An executor whose workers die, and that does not replace them, leaves its tasks to this process: the answer is
    the same, only later.
    """
    waiting = iter(tasks)
    if executor is not None:
        pending: dict[Future[_Result], tuple[_Task, tuple[Any, ...]]] = {}
        try:
            yield from _by_executor(function, waiting, executor, pending)
        except BrokenExecutor:
            for task, arguments in pending.values():
                yield task, function(*arguments)
        finally:
            for future in pending:
                future.cancel()
    for task, arguments in waiting:
        yield task, function(*arguments)


def _by_executor(
    function: Callable[..., _Result],
    waiting: Iterator[tuple[_Task, tuple[Any, ...]]],
    executor: Executor,
    pending: dict[Future[_Result], tuple[_Task, tuple[Any, ...]]],
) -> Iterator[tuple[_Task, _Result]]:
    """Keep the executor supplied until nothing is left; `pending` holds what it has not answered yet."""
    while True:
        for task, arguments in islice(waiting, _IN_FLIGHT - len(pending)):
            try:
                pending[executor.submit(function, *arguments)] = (task, arguments)
            except BrokenExecutor:
                lost: Future[_Result] = Future()
                pending[lost] = (task, arguments)
                raise
        if not pending:
            return
        ready, _ = wait(pending, return_when=FIRST_COMPLETED)
        for future in ready:
            result = future.result()
            yield pending.pop(future)[0], result
