"""Embedded weights: a rule of lower degree on the nodes of another, and the error that the two together tell."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple


@dataclass(frozen=True)
class Embedded:
    """A second set of weights on the same nodes, exact to a lower degree; its difference from the first shows an error.

    `weight_decimals` are in the order of the nodes; some may be 0.
    """

    degree: int
    weight_decimals: tuple[str, ...]


class Estimate(NamedTuple):
    """A mean, and how far the embedded weights differ from it on the same evaluations."""

    value: Any
    error: Any
