"""Where an upper floor lends a lower one what it may not import: set once, by the package itself, as it is imported."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

html: Callable[[Any], str] | None = None  # a rule as HTML, for notebooks
