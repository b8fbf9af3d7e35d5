"""The same search on a dask.distributed cluster of two workers on this machine."""

import os
import signal
import sys

import pytest
from distributed import Client, LocalCluster

import simplexcub as sc
from simplexcub.search import driver

PLAN = {"WALKS": (2,), "ABREAST": 2, "CHUNKS": (12,), "STRUCTURES": (4,), "AGREE": (10**9,)}
COMMAND = ("solve", "hilbert-schmidt", "-N", 3, "-t", 3, "--symmetry", "cyclic", "--digits", 20, "--budget", "10m")


@pytest.fixture(autouse=True)
def short_plan(monkeypatch):
    for name, value in PLAN.items():
        monkeypatch.setattr(driver, name, value)


def local_cluster(workers):
    # Any free port for its pages: the usual one may be taken, of which there would be a warning.
    return LocalCluster(n_workers=workers, threads_per_worker=1, host="127.0.0.1", dashboard_address="127.0.0.1:0")


@pytest.fixture(scope="module")
def cluster():
    with local_cluster(2) as running:
        yield running


@pytest.fixture
def client(cluster):
    with Client(cluster, set_as_default=False) as connected:
        connected.wait_for_workers(2, timeout=60)
        yield connected


def search(**options):
    return sc.solve(sc.hilbert_schmidt(3), 3, symmetry="cyclic", digits=20, budget=600.0, **options)


@pytest.fixture(scope="module")
def alone():
    """The rule of a search in this process."""
    with pytest.MonkeyPatch.context() as patch:
        for name, value in PLAN.items():
            patch.setattr(driver, name, value)
        return search()


def test_the_same_rule_whoever_searches(client, alone):
    assert search(executor=client.get_executor(), jobs=2) == alone


def test_a_worker_killed_in_mid_search_loses_nothing(client, alone):
    seen = []
    victim, survivor = client.run(os.getpid).values()

    def strike(progress):
        seen.append(progress)
        if len(seen) == 5:
            os.kill(victim, signal.SIGKILL)

    assert search(executor=client.get_executor(), jobs=2, progress=strike) == alone
    assert len(seen) > 5
    left = set(client.run(os.getpid).values())
    assert survivor in left
    assert victim not in left


def test_workers_have_one_linear_algebra_thread(client):
    for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        assert set(client.run(os.environ.get, name).values()) == {"1"}


def test_the_command_prints_the_same_table_with_and_without_a_cluster(call, client):
    status, alone, err = call(*COMMAND)
    assert (status, err) == (0, [])
    assert call(*COMMAND, "--cluster", client.scheduler.address) == (0, alone, [])


def test_tasks_at_a_time_are_the_threads_of_the_cluster_or_those_asked_for(call, client, monkeypatch):
    seen = []

    def spy(*_, jobs, executor, **__):
        seen.append((jobs, executor.submit(int, "7").result()))
        raise sc.NothingFound("rule", "a test", "None.")

    monkeypatch.setattr("simplexcub.cli.solve.solve", spy)
    for more in ((), ("--jobs", 5)):
        assert call(*COMMAND, "--cluster", client.scheduler.address, *more)[0] == 1
    assert seen == [(2, 7), (5, 7)]


def test_workers_of_another_version_are_refused(call, client, monkeypatch):
    monkeypatch.setattr("simplexcub.cli.cluster.VERSION", "9.9")
    status, out, err = call(*COMMAND, "--cluster", client.scheduler.address)
    assert (status, out, len(err)) == (2, [], 1)
    assert "every worker of the cluster must have simplexcub 9.9; got '0.1.0' from tcp://127.0.0.1:" in err[0]


def test_a_cluster_without_workers_is_refused(call):
    with local_cluster(0) as empty:
        status, out, err = call(*COMMAND, "--cluster", empty.scheduler_address)
    assert (status, out) == (2, [])
    assert err == ["simplexcub: the cluster must have at least one worker; got 0"]


def test_an_address_where_nothing_answers_is_one_line(call, monkeypatch):
    monkeypatch.setattr("simplexcub.cli.cluster._PATIENCE", "1s")
    status, out, err = call(*COMMAND, "--cluster", "tcp://127.0.0.1:9")
    assert (status, out, len(err)) == (2, [], 1)
    assert "--cluster must be the address of a running scheduler" in err[0]
    assert "got tcp://127.0.0.1:9" in err[0]


def test_without_the_extra_the_way_out_is_named(call, monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    status, out, err = call(*COMMAND, "--cluster", "tcp://127.0.0.1:8786")
    assert (status, out, len(err)) == (2, [], 1)
    assert "pip install 'simplexcub[cluster]'" in err[0]
