"""Where tasks run does not matter: any executor, lost workers, a killed search that goes on from its folder."""

import multiprocessing
import os
import signal
import time
from concurrent.futures import CancelledError, Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor

import pytest
from short_search import search, short_plan, undisturbed  # noqa: F401 -- two of them are fixtures

from simplexcub.search.workers import local_workers


@pytest.mark.parametrize("jobs", [2, 3])
def test_processes_find_the_same_rule(alone, jobs):
    assert search(jobs=jobs) == alone
    assert alone.provenance.method == "orbit search"


def test_threads_find_the_same_rule_and_the_pool_is_left_open(alone):
    with ThreadPoolExecutor(3) as pool:
        assert search(executor=pool, jobs=3) == alone
        assert pool.submit(int, "7").result() == 7


def kill_a_worker(after):
    """A progress callback that kills one of this process's children, once."""
    calls = []

    def strike(_):
        calls.append(None)
        if len(calls) == after:
            victims = [child for child in multiprocessing.active_children() if child.name.startswith("SpawnProcess")]
            os.kill(victims[0].pid, signal.SIGKILL)

    return strike, calls


def test_a_lost_process_loses_nothing(alone):
    strike, calls = kill_a_worker(5)
    assert search(jobs=2, progress=strike) == alone
    assert len(calls) > 5


def test_a_lost_process_of_another_pool_loses_nothing(alone):
    strike, calls = kill_a_worker(5)
    with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as pool:
        assert search(executor=pool, jobs=2, progress=strike) == alone
    assert len(calls) > 5


class Flaky(Executor):
    """Loses every task on its first two ways out, then runs it."""

    def __init__(self, error):
        self.error = error
        self.tries = {}
        self.most = 0

    def submit(self, function, task):
        future = Future()
        self.tries[task.key] = self.tries.get(task.key, 0) + 1
        if self.tries[task.key] > 2:
            future.set_result(function(task))
        elif isinstance(self.error, CancelledError):
            future.cancel()
            future.set_running_or_notify_cancel()
        else:
            future.set_exception(self.error)
        return future


@pytest.mark.parametrize("error", [CancelledError(), ConnectionResetError("gone"), OSError("closed"), TimeoutError()])
def test_lost_tasks_are_tried_again(alone, error):
    flaky = Flaky(error)
    assert search(executor=flaky, jobs=2) == alone
    assert set(flaky.tries.values()) <= {1, 2, 3}  # fewer where the search ended before they were waited for
    assert 3 in flaky.tries.values()


def test_a_task_that_fails_of_its_own_accord_is_not_tried_again():
    flaky = Flaky(ZeroDivisionError("a mistake"))
    with pytest.raises(ZeroDivisionError):
        search(executor=flaky)
    assert max(flaky.tries.values()) == 1


class Silent(Executor):
    """Runs some tasks and never answers for the others, as a cluster without workers."""

    def __init__(self, answers):
        self.answers = answers

    def submit(self, function, task):
        future = Future()
        self.answers -= 1
        if self.answers >= 0:
            future.set_result(function(task))
        return future


def test_nothing_is_waited_for_beyond_the_budget():
    begin = time.monotonic()
    assert search(executor=Silent(0), budget=0.5).provenance.method == "conical product"
    assert time.monotonic() - begin < 30


def test_what_was_found_before_the_workers_went_silent_is_kept():
    seen = []
    kept = search(executor=Silent(6), budget=3.0, progress=seen.append)
    assert kept.provenance.method == "orbit search"
    assert 3 <= len(seen) <= 6


class Probe:
    """A task that tells what it sees of its worker."""

    key = "probe"

    def run(self):
        return {name: os.environ.get(name) for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")}


def test_workers_have_one_linear_algebra_thread_and_this_process_keeps_its_own(monkeypatch):
    monkeypatch.setenv("OMP_NUM_THREADS", "7")
    monkeypatch.delenv("MKL_NUM_THREADS", raising=False)
    with local_workers(2) as workers:
        (seen,) = workers.run_all([Probe()])
    assert set(seen.values()) == {"1"}
    assert os.environ["OMP_NUM_THREADS"] == "7"
    assert "MKL_NUM_THREADS" not in os.environ
