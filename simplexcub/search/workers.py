"""Where tasks run: in this process, in a pool, or on a cluster; and the folder that remembers finished ones.

Any :class:`concurrent.futures.Executor` serves. A task whose worker is lost is run again; nothing else is lost with
it. With a folder, every finished task is written there at once and never computed twice.
"""

from __future__ import annotations

import math
import os
import signal
import sys
import time
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import BrokenExecutor, CancelledError, Executor, Future, ProcessPoolExecutor, wait
from contextlib import contextmanager, suppress
from multiprocessing import get_context
from multiprocessing.connection import Connection
from threading import Thread
from typing import Any, TypeVar

from simplexcub.search.levenberg import Overdue, until
from simplexcub.search.record import Record
from simplexcub.search.tasks import Chunk, Leg, run_task

Task = TypeVar("Task", Chunk, Leg)

_AHEAD = 2  # tasks waiting per worker
_RETRIES = 3
_THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")


class Workers:
    """Runs tasks and gives their results in the order asked.

    Attributes
    ----------
    deadline : float
        By ``time.monotonic()``; no result is waited for beyond it. A cluster whose last worker is gone would else be
        waited for without end.

    Parameters
    ----------
    make : callable, optional
        Makes the executor, and makes it again when a lost worker has broken it. Without it tasks run here.
    count : int
        How many tasks may run at a time.
    record : Record, optional
        Folder of finished tasks.
    owned : bool
        Whether to shut the executor down in the end.
    """

    def __init__(
        self,
        make: Callable[[], Executor] | None = None,
        count: int = 1,
        record: Record | None = None,
        *,
        owned: bool = True,
    ) -> None:
        self._make = make
        self._owned = owned
        self._count = count
        self._record = record
        self._executor = make() if make is not None else None
        self.deadline = math.inf

    def close(self) -> None:
        """Let go of the executor; tasks still running are not waited for."""
        if self._executor is not None and self._owned:
            self._executor.shutdown(wait=False, cancel_futures=True)

    def run_all(self, tasks: Iterable[Task]) -> Iterator[Any]:
        """Results of all tasks, in order; raises `Overdue` as `in_order` does."""
        for _, result in self.in_order(tasks):
            yield result

    def in_order(self, tasks: Iterable[Task]) -> Iterator[tuple[Task, Any]]:
        """(task, result) in the order of the tasks; a few run ahead.

        Raises
        ------
        Overdue
            The deadline came first.
        """
        source = iter(tasks)
        waiting: deque[tuple[Task, Future[Any] | None]] = deque()
        try:
            while True:
                while len(waiting) < (_AHEAD * self._count if self._executor is not None else 1):
                    task = next(source, None)
                    if task is None:
                        break
                    waiting.append((task, self._submit(task)))
                if not waiting:
                    return
                task, future = waiting.popleft()
                yield task, self._result(task, future, waiting)
        finally:
            for _, future in waiting:
                if future is not None:
                    future.cancel()

    def _submit(self, task: Task) -> Future[Any] | None:
        """The running task, or None where it is known already or runs here."""
        if self._executor is None or (self._record is not None and self._record.has(task)):
            return None
        try:
            return self._executor.submit(run_task, task)
        except BrokenExecutor:
            return None

    def _result(self, task: Task, future: Future[Any] | None, waiting: deque[tuple[Task, Future[Any] | None]]) -> Any:
        if self._record is not None and self._record.has(task):
            return self._record.get(task)
        result = self._computed(task, future, waiting)
        if self._record is not None:
            self._record.put(task, result)
        return result

    def _computed(self, task: Task, future: Future[Any] | None, waiting: deque[tuple[Task, Future[Any] | None]]) -> Any:
        for _ in range(_RETRIES):
            if future is None:
                break
            left = self.deadline - time.monotonic()
            wait([future], timeout=max(left, 0.0) if math.isfinite(left) else None)
            if not future.done():
                self._drop(future)
                raise Overdue
            try:
                return future.result()
            except BrokenExecutor:
                self._mend()
                future = self._submit(task)
                for i, (other, _) in enumerate(waiting):
                    waiting[i] = (other, self._submit(other))
            except Exception as error:
                if not _is_loss(error):
                    raise
                future = self._submit(task)
        with until(self.deadline):
            return run_task(task)

    def _drop(self, future: Future[Any]) -> None:
        """Let go of a task that may be running; in processes of our own it would be in the way of the next search."""
        if not future.cancel() and self._owned:
            self._mend()

    def _mend(self) -> None:
        self.close()
        # An executor that is not ours cannot be made anew: what it loses is run here.
        self._executor = self._make() if self._make is not None and self._owned else None


def _is_loss(error: Exception) -> bool:
    """Whether a future ended so because its worker or the way there was lost, through no fault of its task."""
    distributed = sys.modules.get("distributed")  # loaded where the executor is one of its own
    losses = (CancelledError, OSError, *(() if distributed is None else (distributed.KilledWorker,)))
    return isinstance(error, losses)


class _Processes(ProcessPoolExecutor):
    """Processes that end with this one, however it ends, and at once when they are told to."""

    def __init__(self, count: int) -> None:
        context = get_context("spawn")
        # No worker holds the other end: it closes when this process closes it, or is killed.
        listener, self._lifeline = context.Pipe(duplex=False)
        super().__init__(count, mp_context=context, initializer=_live, initargs=(listener,))

    def shutdown(self, wait: bool = True, *, cancel_futures: bool = False) -> None:
        if cancel_futures:
            self._lifeline.close()
        super().shutdown(wait, cancel_futures=cancel_futures)


def _live(lifeline: Connection) -> None:
    """Prepare a worker: it leaves Ctrl-C to the process that waits for it, and ends when the line is cut."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)

    def watch() -> None:
        with suppress(OSError, EOFError):
            lifeline.recv_bytes()
        os._exit(0)

    Thread(target=watch, daemon=True).start()


@contextmanager
def local_workers(jobs: int, record: Record | None = None) -> Iterator[Workers]:
    """Processes on this machine with one linear-algebra thread each; one job runs here."""
    if jobs == 1:
        yield Workers(record=record)
        return
    before = {name: os.environ.get(name) for name in _THREADS}
    os.environ.update(dict.fromkeys(_THREADS, "1"))  # inherited by the workers; this process has read its own already
    workers = Workers(lambda: _Processes(jobs), jobs, record)
    try:
        yield workers
    finally:
        workers.close()
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value
