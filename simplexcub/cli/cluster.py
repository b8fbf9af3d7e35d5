"""A running dask.distributed cluster as a place to search; needs the extra ``cluster``."""

from __future__ import annotations

import re
from collections.abc import Iterator
from concurrent.futures import Executor
from contextlib import contextmanager
from typing import Any

from simplexcub.errors import InputError
from simplexcub.version import VERSION

_PATIENCE = "10s"


@contextmanager
def cluster_executor(address: str) -> Iterator[tuple[Executor, int]]:
    """The cluster whose scheduler is at `address` as an executor, with the number of tasks that it runs at a time.

    Raises
    ------
    InputError
        The extra is not installed, nothing answers at the address, or a worker has no such version of the package.
    """
    try:
        from distributed import Client
    except ImportError:
        raise InputError(
            "--cluster needs the package distributed", "none", "Install it: pip install 'simplexcub[cluster]'"
        ) from None
    rule = "--cluster must be the address of a running scheduler such as tcp://127.0.0.1:8786"
    if not re.fullmatch(r"(tcp|tls|wss?)://\S+:\d{1,5}", address):
        raise InputError(rule, address)
    try:
        client = Client(address, timeout=_PATIENCE, set_as_default=False)
    except OSError as error:
        raise InputError(rule, address, str(error)) from None
    with client:
        yield client.get_executor(), _threads(client)


def package_version() -> str:
    """Asked of every worker."""
    return VERSION


def _threads(client: Any) -> int:
    """How many tasks the cluster runs at a time, once every worker is known to have this version of the package."""
    answers = client.run(package_version, on_error="return")
    for worker, answer in answers.items():
        if answer != VERSION:
            raise InputError(
                f"every worker of the cluster must have simplexcub {VERSION}",
                f"{answer!r} from {worker}",
            )
    if not answers:
        raise InputError("the cluster must have at least one worker", 0)
    return sum(client.nthreads().values())
