"""A folder of finished tasks, so that a search can be stopped at any moment and go on later.

One file per task, named by the task's key and written through a temporary file, so that a file is whole or absent.
Only arrays of numbers are stored; reading them runs no code.
"""

from __future__ import annotations

import os
import tempfile
import zipfile
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from simplexcub.errors import InputError
from simplexcub.search.chosen import Chosen
from simplexcub.search.counts import Counts
from simplexcub.search.eliminate import Walk
from simplexcub.search.system import FloatArray
from simplexcub.search.tasks import Chunk, Leg
from simplexcub.symmetry import OrbitType


class Record:
    """Results of finished tasks in `folder`, which is made if it does not exist.

    Raises
    ------
    InputError
        The folder cannot be made or written.
    """

    def __init__(self, folder: str | Path) -> None:
        self._folder = Path(folder)
        try:
            self._folder.mkdir(parents=True, exist_ok=True)
            with tempfile.TemporaryFile(dir=self._folder):
                pass
        except OSError as error:
            raise InputError(
                "the search folder must be a folder that can be written", folder, f"{error.strerror}. Choose another."
            ) from None

    def _path(self, task: Chunk | Leg) -> Path:
        return self._folder / f"{task.key}.npz"

    def has(self, task: Chunk | Leg) -> bool:
        """Whether the task is finished."""
        return self._path(task).exists()

    def get(self, task: Chunk | Leg) -> FloatArray | Walk:
        """The result of a finished task; a damaged file is computed anew."""
        try:
            with self._path(task).open("rb") as file, np.load(file, allow_pickle=False) as data:
                pool: FloatArray = data["pool"]
                if isinstance(task, Chunk):
                    return pool
                counts = _counts(task.problem.types, data["patterns"], data["numbers"])
                at_once, shaken, ended = (int(v) for v in data["state"])
                return Walk(counts, pool, at_once, shaken, bool(ended))
        except (OSError, ValueError, TypeError, KeyError, EOFError, zipfile.BadZipFile):
            result = task.run()
            self.put(task, result)
            return result

    def put(self, task: Chunk | Leg, result: FloatArray | Walk) -> None:
        """Write a result, whole or not at all."""
        if isinstance(result, Walk):
            arrays = {
                "pool": result.pool,
                "patterns": np.array([_label(t) for t, _ in result.counts], dtype=np.int64),
                "numbers": np.array([c for _, c in result.counts], dtype=np.int64),
                "state": np.array([result.at_once, result.shaken, result.ended], dtype=np.int64),
            }
        else:
            arrays = {"pool": result}
        handle, name = tempfile.mkstemp(dir=self._folder, suffix=".part")
        try:
            with os.fdopen(handle, "wb") as file:
                np.savez(file, allow_pickle=False, **arrays)
                file.flush()
                os.fsync(file.fileno())
            os.replace(name, self._path(task))
        except BaseException:
            Path(name).unlink(missing_ok=True)
            raise


def _label(type_: OrbitType) -> tuple[int, ...]:
    """The pattern, with labels below zero where the orbit is chosen."""
    return tuple(-1 - label for label in type_.pattern) if isinstance(type_, Chosen) else type_.pattern


def _counts(known: Sequence[OrbitType], patterns: np.ndarray, numbers: np.ndarray) -> Counts:
    types = {_label(t): t for t in known}
    return tuple((types[tuple(int(i) for i in p)], int(c)) for p, c in zip(patterns, numbers, strict=True))
