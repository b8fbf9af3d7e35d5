"""The folder of a search: it goes on after any end, without repeating, and ends with the same rule."""

import random
import signal
import subprocess
import sys
import time

import numpy as np
import psutil
import pytest
from conftest import package_environment
from short_search import CASE, PLAN, search, short_plan, undisturbed  # noqa: F401 -- two of them are fixtures

import simplexcub as sc
from simplexcub.search.record import Record
from simplexcub.search.tasks import Chunk, Leg, run_task
from simplexcub.symmetry import named_group


def counted(monkeypatch):
    """Counts the tasks that are run in this process."""
    run = []

    def count(task):
        run.append(task.key)
        return run_task(task)

    monkeypatch.setattr("simplexcub.search.workers.run_task", count)
    return run


def test_a_finished_search_is_read_from_its_folder(alone, tmp_path, monkeypatch):
    run = counted(monkeypatch)
    assert search(resume=tmp_path) == alone
    assert sorted(run) == sorted(path.stem for path in tmp_path.iterdir())
    assert len(set(run)) == len(run) == 14
    run.clear()
    assert search(resume=tmp_path) == alone
    assert search(resume=tmp_path, jobs=2) == alone
    assert run == []


def test_a_folder_serves_other_searches_too_without_mixing_them(tmp_path):
    first = search(resume=tmp_path)
    other = search(resume=tmp_path, seed=1)
    assert other == search(seed=1) != first


def test_an_interrupted_search_goes_on_without_repeating(alone, tmp_path, monkeypatch):
    run = counted(monkeypatch)

    def stop(_):
        if len(run) == 7:
            raise KeyboardInterrupt

    search(resume=tmp_path, progress=stop)
    assert len(run) == 7
    assert search(resume=tmp_path) == alone
    assert len(set(run)) == len(run) == 14


@pytest.mark.parametrize(
    "damage",
    [
        lambda data: b"",
        lambda data: data[: len(data) // 2],
        lambda data: data[:-1],
        lambda data: data.replace(b"pool", b"poll"),
        lambda data: bytes([*data[:200], data[200] ^ 1, *data[201:]]),
        lambda data: b"not an archive",
        lambda data: b"\x93NUMPY" + data[6:],
    ],
)
def test_damaged_records_are_computed_anew(alone, tmp_path, damage, monkeypatch):
    search(resume=tmp_path)
    files = sorted(tmp_path.iterdir())
    whole = {path: path.read_bytes() for path in files}
    for path in files[::3]:
        path.write_bytes(damage(whole[path]))
    assert search(resume=tmp_path) == alone
    for path in files[::3]:
        with np.load(path) as data:
            assert "pool" in data


@pytest.mark.parametrize(("n", "name", "degree"), [(3, "cyclic", 5), (4, "klein", 3), (3, "full", 7)])
def test_records_give_back_what_was_put(tmp_path, n, name, degree):
    from simplexcub.search.system import Problem

    record = Record(tmp_path / "deeper" / "folder")
    problem = Problem(sc.flat(n), degree, named_group(name, n))
    leg = Leg(problem, 0, 0, 0, None)
    assert not record.has(leg)
    walk = leg.run()
    record.put(leg, walk)
    assert record.has(leg)
    back = record.get(leg)
    assert (back.counts, back.at_once, back.shaken, back.ended) == (walk.counts, walk.at_once, walk.shaken, walk.ended)
    assert np.array_equal(back.pool, walk.pool)
    chunk = Chunk(problem, walk.counts, 0, 0)
    solutions = chunk.run()
    record.put(chunk, solutions)
    assert np.array_equal(record.get(chunk), solutions)
    keys = {leg.key, chunk.key, Leg(problem, 1, 0, 0, None).key, Leg(problem, 0, 1, 0, None).key}
    assert len(keys | {Leg(problem, 0, 0, 1, walk).key, Chunk(problem, walk.counts, 0, 1).key}) == 6


def test_a_folder_that_cannot_be_written_is_refused(tmp_path):
    (tmp_path / "file").write_text("here already")
    for folder in (tmp_path / "file", tmp_path / "file" / "below"):
        with pytest.raises(sc.InputError, match="the search folder must be a folder that can be written"):
            search(resume=folder)


PROGRAM = f"""
import simplexcub as sc
from simplexcub.search import driver
if __name__ == "__main__":
    import sys
    for name, value in {PLAN!r}.items():
        setattr(driver, name, value)
    jobs, folder, out = sys.argv[1:]
    rule = sc.solve(sc.hilbert_schmidt(3), jobs=int(jobs), resume=folder, **{CASE!r})
    sc.save(rule, out)
"""


@pytest.mark.parametrize(("jobs", "kills"), [(1, 3), (2, 2)])
def test_a_search_killed_again_and_again_ends_with_the_same_rule(alone, tmp_path, jobs, kills):
    rng = random.Random(jobs)
    folder, out, program = tmp_path / "search", tmp_path / "rule.json", tmp_path / "program.py"
    program.write_text(PROGRAM)
    folder.mkdir()
    command = [sys.executable, str(program), str(jobs), str(folder), str(out)]

    def finished():
        return {path.name: path.stat().st_mtime_ns for path in folder.glob("*.npz")}

    for _ in range(kills):
        goal = len(finished()) + rng.randint(1, 4)
        with subprocess.Popen(command, env=package_environment(), stderr=subprocess.DEVNULL) as process:
            while len(finished()) < goal:
                assert process.poll() is None
                time.sleep(0.002)
            time.sleep(rng.uniform(0, 0.05))
            family = [psutil.Process(process.pid), *psutil.Process(process.pid).children(recursive=True)]
            process.kill()
        assert process.returncode == -signal.SIGKILL
        assert psutil.wait_procs(family, timeout=30)[1] == []  # workers do not outlive the search
    before = finished()
    subprocess.run(command, env=package_environment(), check=True, timeout=120)
    assert before.items() <= finished().items()
    assert sc.read(out) == alone
