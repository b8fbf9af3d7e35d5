"""Noticing Ctrl-C where the work below answers it by returning the best it has."""

from __future__ import annotations

import signal
from types import FrameType, TracebackType
from typing import NoReturn


class InterruptNoted:
    """Raises KeyboardInterrupt as usual, and remembers in `seen` that it did."""

    def __init__(self) -> None:
        self.seen = False

    def __enter__(self) -> InterruptNoted:
        self._before = signal.getsignal(signal.SIGINT)
        if self._before is signal.default_int_handler:  # switched off in background jobs, and then it stays off
            signal.signal(signal.SIGINT, self._note)
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        signal.signal(signal.SIGINT, self._before)

    def _note(self, number: int, frame: FrameType | None) -> NoReturn:
        self.seen = True
        raise KeyboardInterrupt
