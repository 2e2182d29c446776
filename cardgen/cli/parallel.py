"""The same work on many jobs, on every core, in processes that die with the one that asked."""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import signal
import threading
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from multiprocessing.connection import wait
from typing import Final, TypeVar

from cardgen.errors import ReleaseError

Job = TypeVar("Job")
Result = TypeVar("Result")

_WORTH_STARTING: Final = 4
"""Jobs from which processes are worth their start: one job takes about as long as starting."""


def cores() -> int:
    """Return how many cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def spread(
    work: Callable[[Job], Result], jobs: Sequence[Job], *, preload: Sequence[str] = ()
) -> Iterator[Result]:
    """Yield the result of every job, in their order.

    Parameters
    ----------
    work : callable
        Function of a module, whose arguments and results can be pickled; it must not raise [-]
    jobs : sequence
        What it is called with [-]
    preload : sequence of str
        Modules worth importing once for all processes [-]

    Yields
    ------
    object
        What the function returned [-]

    Raises
    ------
    ReleaseError
        A process was ended from outside.
    """
    processes = min(cores(), len(jobs))
    if processes < 2 or len(jobs) < _WORTH_STARTING:
        yield from map(work, jobs)
        return
    # The cores are taken by jobs; linear algebra that starts threads of its own would only crowd.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    method = "forkserver" if "forkserver" in multiprocessing.get_all_start_methods() else "spawn"
    context = multiprocessing.get_context(method)
    if method == "forkserver":
        context.set_forkserver_preload(list(preload))
    pool = ProcessPoolExecutor(processes, mp_context=context, initializer=_begin)
    try:
        with _undisturbed():  # the first job starts the processes
            answers = pool.map(work, jobs)
        yield from answers
    except BrokenProcessPool as error:
        raise ReleaseError(
            "a process that was making cards was ended from outside (out of memory?); cards told "
            "as released stand, run again for the others"
        ) from error
    finally:
        pool.shutdown(cancel_futures=True)


@contextlib.contextmanager
def _undisturbed() -> Iterator[None]:
    """Put off what the keyboard says until processes stand: those half started would complain."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _begin() -> None:
    """Leave the keyboard to the process that asked, and end when it ends."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    parent = multiprocessing.parent_process()
    if parent is not None:
        threading.Thread(target=_end_with, args=(parent.sentinel,), daemon=True).start()


def _end_with(sentinel: int) -> None:
    """Wait for the end of a process, then end this one on the spot."""
    wait([sentinel])
    os._exit(1)
