"""Files: what exists is never lost, nothing is left lying about, and refusals name the path."""

import errno
import os
import signal
import stat
import subprocess
import sys
import textwrap

import pytest
from conftest import package_environment
from test_table import simpson, vertices_and_centre

from simplexcub.errors import InputError, TableError
from simplexcub.table import encode, read, save
from simplexcub.table import files as table_files


def full_disk(*_):
    raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


@pytest.mark.parametrize("step", ["open", "fsync", "replace"])
def test_a_failure_at_any_step_keeps_the_old_file_and_leaves_no_other(step, tmp_path, monkeypatch):
    path = tmp_path / "rule.json"
    save(simpson(), path)
    before = path.read_bytes()
    monkeypatch.setattr(table_files.os, step, full_disk)
    with pytest.raises(InputError, match=r"rule\.json must be a path that can be written; got no space left on device"):
        save(vertices_and_centre(), path)
    assert path.read_bytes() == before
    assert list(tmp_path.iterdir()) == [path]


def test_an_interrupt_leaves_no_temporary_file(tmp_path, monkeypatch):
    def interrupt(_):
        raise KeyboardInterrupt

    monkeypatch.setattr(table_files.os, "fsync", interrupt)
    with pytest.raises(KeyboardInterrupt):
        save(simpson(), tmp_path / "rule.json")
    assert not list(tmp_path.iterdir())


def test_a_kill_in_the_middle_of_writing_leaves_the_old_file(tmp_path):
    path = tmp_path / "rule.json"
    save(simpson(), path)
    script = textwrap.dedent(
        f"""
        import os, signal
        from simplexcub.table import files
        files.os.fsync = lambda _: os.kill(os.getpid(), signal.SIGKILL)
        files.write_atomically({str(path)!r}, b"half a table")
        """
    )
    done = subprocess.run([sys.executable, "-c", script], env=package_environment(), timeout=60, check=False)
    assert done.returncode == -signal.SIGKILL
    assert read(path) == simpson()


def test_writing_twice_replaces(tmp_path):
    path = tmp_path / "rule.json"
    save(vertices_and_centre(), path)
    save(simpson(), path)
    assert read(path) == simpson()
    assert list(tmp_path.iterdir()) == [path]


def test_a_link_keeps_pointing_at_what_is_written(tmp_path):
    target, link = tmp_path / "rule.json", tmp_path / "link.json"
    save(vertices_and_centre(), target)
    link.symlink_to(target)
    save(simpson(), link)
    assert link.is_symlink()
    assert read(target) == simpson()


def test_permissions_of_an_existing_file_are_kept_and_new_ones_obey_the_umask(tmp_path):
    old, new = tmp_path / "old.json", tmp_path / "new.json"
    old.write_text("")
    old.chmod(0o640)
    mask = os.umask(0o027)
    try:
        save(simpson(), old)
        save(simpson(), new)
    finally:
        os.umask(mask)
    assert [stat.S_IMODE(path.stat().st_mode) for path in (old, new)] == [0o640, 0o640]


def test_a_device_is_written_to_and_not_replaced():
    save(simpson(), os.devnull, to="json")
    assert stat.S_ISCHR(os.stat(os.devnull).st_mode)


@pytest.mark.parametrize("name", ["no/such/folder/rule.json", "folder.json", "rule\0.json", "n" * 300 + ".json"])
def test_a_path_that_cannot_be_written_is_named(name, tmp_path):
    (tmp_path / "folder.json").mkdir()
    with pytest.raises(InputError, match="must be a path that can be written") as caught:
        save(simpson(), str(tmp_path / name))
    assert str(tmp_path / name) in str(caught.value)
    assert list(tmp_path.iterdir()) == [tmp_path / "folder.json"]


@pytest.mark.parametrize("name", ["missing.json", ".", "nul\0.json"])
def test_a_path_that_cannot_be_read_is_named(name, tmp_path):
    with pytest.raises(InputError, match="must be a readable file") as caught:
        read(str(tmp_path / name))
    assert name in str(caught.value)


@pytest.mark.parametrize(
    ("data", "found"),
    [
        (b"\x1f\x8b\x08\x00rest", "gzip"),
        (encode(simpson(), "npz"), "a zip or npz archive"),
        ("1 0 1\n".encode("utf-16"), "UTF-16"),
        (b"%PDF-1.5", "PDF"),
        (b"1 0 1\0\n", "binary"),
        (b"0.5 0.5 1 \xff\xfe\n", "byte 10"),
    ],
    ids=["gzip", "npz", "utf-16", "pdf", "nul", "latin"],
)
def test_what_is_not_text_is_called_what_it_is(data, found, tmp_path):
    path = tmp_path / "rule.csv"
    path.write_bytes(data)
    with pytest.raises(TableError, match=found) as caught:
        read(path)
    assert "rule.csv" in str(caught.value)


def test_a_file_of_monstrous_size_is_refused_unread(tmp_path):
    path = tmp_path / "rule.csv"
    with open(path, "wb") as file:
        file.truncate(table_files.LARGEST_FILE + 1)
    with pytest.raises(TableError, match="at most 64 MB"):
        read(path)
