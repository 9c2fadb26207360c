"""Where large work is done: processes or threads of this machine, or a cluster, each an executor."""

from __future__ import annotations

import math
import os
import signal
from collections.abc import Iterator
from concurrent.futures import Executor, ProcessPoolExecutor, ThreadPoolExecutor
from contextlib import contextmanager
from importlib.util import find_spec
from typing import Any

from actuator_sizing.case.model import Case
from actuator_sizing.errors import InputError, Problem

_SHARED_PAIRS = 2e8  # motor × gearhead pairs from which processes win more than they cost to start
_KEPT_SETS = 1e8  # sets from which what was found is worth keeping: some seconds of screening and evaluation
_PATIENCE_S = 10  # for the answer of a scheduler


def is_shared(case: Case) -> bool:
    """Whether the screening of a case takes so long that processes share it by default."""
    return len(case.motor_parameters) * len(case.gearhead_parameters) >= _SHARED_PAIRS


def is_kept(case: Case) -> bool:
    """Whether the screening of a case takes so long that what it finds is kept by default."""
    parts = (case.motor_parameters, case.gearhead_parameters, case.drive_parameters)
    return math.prod(len(part) for part in parts) >= _KEPT_SETS


@contextmanager
def local_processes(workers: int | None = None) -> Iterator[Executor]:
    """Processes of this machine.

    Parameters
    ----------
    workers : int, optional
        How many; default: one for each processor. [-]

    Yields
    ------
    Executor
        Ends with the block; what is not begun by then is left.
    """
    # Ctrl-C reaches every process of the terminal: only the one that keeps the results is to act on it.
    pool = ProcessPoolExecutor(workers or os.cpu_count(), initializer=_ignore_interrupt)
    try:
        yield pool
    finally:
        pool.shutdown(wait=True, cancel_futures=True)


def _ignore_interrupt() -> None:
    signal.signal(signal.SIGINT, signal.SIG_IGN)


@contextmanager
def local_threads(workers: int | None = None) -> Iterator[Executor]:
    """Threads of this process, which share its processors where the optional compiler (extra `fast`) is at work.

    Parameters
    ----------
    workers : int, optional
        How many; default: one for each processor. [-]

    Yields
    ------
    Executor
        Ends with the block; what is not begun by then is left.
    """
    pool = ThreadPoolExecutor(workers or os.cpu_count())
    try:
        yield pool
    finally:
        pool.shutdown(wait=True, cancel_futures=True)


@contextmanager
def cluster(address: str) -> Iterator[Executor]:
    """Workers of a dask.distributed scheduler; each needs this package in the same version.

    Parameters
    ----------
    address : str
        Of the scheduler, such as ``"tcp://127.0.0.1:8786"``.

    Yields
    ------
    Executor
        A worker that dies is replaced by the others: its shards are worked out anew.

    Raises
    ------
    InputError
        If the scheduler does not answer, or dask.distributed is not installed.
    """
    try:
        import distributed
    except ImportError as error:
        raise _no_cluster(
            address,
            "dask.distributed, which is not installed",
            "Install it: python -m pip install 'actuator-sizing[cluster]'.",
        ) from error
    connect: Any = distributed.Client  # untyped
    try:
        client = connect(address, timeout=_PATIENCE_S, set_as_default=False)
    except (OSError, ValueError) as error:  # a time-out is an OSError too
        raise _no_cluster(
            address,
            "the address of a dask scheduler that answers, such as tcp://127.0.0.1:8786",
            f"Start one with 'dask scheduler', check address and firewall, or leave out --cluster ({error}).",
        ) from error
    try:
        yield client.get_executor(retries=3)
    finally:
        client.close()


def _no_cluster(address: str, allowed: str, remedy: str) -> InputError:
    return InputError([Problem("--cluster", None, "", address, allowed, remedy)])


@contextmanager
def workplace(
    case: Case, workers: int | None = None, address: str | None = None
) -> Iterator[Executor | None]:
    """The executor that a user asked for, or that the size of a case calls for.

    Parameters
    ----------
    case : Case
        The case; where it is large, processes are the default. [-]
    workers : int, optional
        Processes wanted. [-]
    address : str, optional
        Scheduler of a cluster, which goes before processes.

    Yields
    ------
    Executor or None
        None: in this process.

    Raises
    ------
    InputError
        If the scheduler does not answer.
    """
    if address is not None:
        with cluster(address) as executor:
            yield executor
    elif workers is not None and workers > 1 or workers is None and is_shared(case):
        compiled = is_shared(case) and find_spec("numba") is not None
        with local_threads(workers) if compiled else local_processes(workers) as executor:
            yield executor
    else:
        yield None
