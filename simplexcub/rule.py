"""The frozen result: nodes and weights as printed decimals, with the measure, space and degree they are exact for.

The decimal strings are the rule. Float arrays and mpmath numbers are made from them, never the other way round, so a
rule that is written, read back and written again keeps every digit.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any, Literal

import numpy as np
from mpmath import mp, mpf
from numpy.typing import NDArray

from simplexcub import hooks
from simplexcub.embedded import Embedded, Estimate
from simplexcub.errors import InputError
from simplexcub.measures import Measure

Space = Literal["all", "symmetric", "ordered"]
FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Orbit:
    """One orbit of S_N: `values` are the distinct coordinates, `multiplicities` how often each stands in a node.

    `weight` is that of the whole orbit; each of its nodes carries an equal share.
    """

    multiplicities: tuple[int, ...]
    values: tuple[str, ...]
    weight: str


@dataclass(frozen=True)
class Verification:
    """What an independent check found; the block that stands under every printed table.

    Attributes
    ----------
    moments_checked : int
        Number of monomials whose quadrature sum was compared with the exact mean.
    max_residual : str
        Largest |Σ w p(λ) − E[p]| over those monomials.
    worst_exponents : tuple of int
        Exponents of the monomial it fell on.
    fails_at_degree : int
        Lowest degree at which the rule is not exact.
    positive, inside : bool
        All weights > 0; all nodes on the closed simplex.
    lower_bound : int
        No rule of this degree with nodes inside has fewer nodes.
    proof : dict or None
        The certificate that an exact rule exists nearby; None where none was made.
    """

    moments_checked: int
    max_residual: str
    worst_exponents: tuple[int, ...]
    fails_at_degree: int
    positive: bool
    inside: bool
    lower_bound: int
    proof: dict[str, Any] | None = None


@dataclass(frozen=True)
class Provenance:
    """Where a rule comes from: package version, seed, ISO date and the method that built it."""

    package: str
    seed: int
    date: str
    method: str


@dataclass(frozen=True)
class Rule:
    """Nodes and weights with Σ_k w_k p(λ^(k)) = E[p] for every p in `space` of degree ≤ `degree`.

    Attributes
    ----------
    measure : Measure
    degree : int
    node_decimals : tuple of tuple of str, shape (M, N)
        Barycentric coordinates, each row summing to 1.
    weight_decimals : tuple of str, shape (M,)
        Summing to 1.
    space : {"all", "symmetric", "ordered"}
        Polynomials in λ; symmetric ones, each node standing for all its orderings with their total weight; or those of
        the ordered spectrum λ_1 ≥ … ≥ λ_N. In the last two every node has its largest coordinate first.
    symmetry : str
        Group that leaves the node set unchanged, by its name in :func:`simplexcub.symmetry.named_group`.
    digits : int
        Significant digits of every decimal.
    orbits : tuple of Orbit
        The same nodes, one entry per orbit, where the symmetry is full.
    also : tuple of str
        Functions that it averages exactly besides the polynomials, by their names in :mod:`simplexcub.entropic`.
    integer_weights : tuple of int
        Where all weights are small integers over their sum, these integers.
    embedded : Embedded or None
        A second set of weights of lower degree.
    """

    measure: Measure
    degree: int
    node_decimals: tuple[tuple[str, ...], ...]
    weight_decimals: tuple[str, ...]
    provenance: Provenance
    space: Space = "all"
    symmetry: str = "full"
    equal_weights: bool = False
    digits: int = 50
    orbits: tuple[Orbit, ...] = ()
    also: tuple[str, ...] = ()
    integer_weights: tuple[int, ...] = ()
    embedded: Embedded | None = None
    verification: Verification | None = field(default=None, compare=False)

    def __post_init__(self) -> None:
        if len(self.node_decimals) != len(self.weight_decimals):
            raise InputError("there must be one weight per node", f"{len(self.weight_decimals)} weights")
        for name, column in (
            ("embedded weight", self.embedded and self.embedded.weight_decimals),
            ("integer weight", self.integer_weights),
        ):
            if column and len(column) != len(self.node_decimals):
                raise InputError(f"there must be one {name} per node", f"{len(column)} weights")
        if any(k < 1 for k in self.integer_weights):
            raise InputError("integer weights must be at least 1", min(self.integer_weights))
        if not self.node_decimals:
            raise InputError("a rule must have at least one node", 0)
        for node in self.node_decimals:
            if len(node) != self.measure.N:
                raise InputError(f"every node must have N = {self.measure.N} coordinates", f"{len(node)} coordinates")

    def __len__(self) -> int:
        return len(self.node_decimals)

    def __repr__(self) -> str:
        return f"<Rule {self.measure}, {self.space}, degree {self.degree}, {len(self)} nodes, {self.digits} digits>"

    def _repr_html_(self) -> str | None:
        """What a notebook shows; None, and so the plain form, where no upper floor has lent the way to make it."""
        return None if hooks.html is None else hooks.html(self)

    @cached_property
    def nodes(self) -> FloatArray:
        """Barycentric nodes, shape (M, N), float64, read-only."""
        return _frozen([[float(x) for x in node] for node in self.node_decimals])

    @cached_property
    def weights(self) -> FloatArray:
        """Weights, shape (M,), float64, read-only."""
        return _frozen([float(w) for w in self.weight_decimals])

    @cached_property
    def embedded_weights(self) -> FloatArray:
        """The second set of weights, shape (M,), float64, read-only.

        Raises
        ------
        InputError
            The rule has none.
        """
        if self.embedded is None:
            raise InputError("the rule must have embedded weights", self, "Make them: embed(rule).")
        return _frozen([float(w) for w in self.embedded.weight_decimals])

    def exact_nodes(self, dps: int | None = None) -> list[list[mpf]]:
        """Nodes as mpmath numbers, rounded to `dps` digits (all digits of the table by default)."""
        with mp.workdps(dps or self.digits + 10):
            return [[mpf(x) for x in node] for node in self.node_decimals]

    def exact_weights(self, dps: int | None = None) -> list[mpf]:
        """Weights as mpmath numbers, rounded to `dps` digits (all digits of the table by default)."""
        with mp.workdps(dps or self.digits + 10):
            return [mpf(w) for w in self.weight_decimals]

    def average(self, f: Callable[[FloatArray], Any]) -> Any:
        """Σ_k w_k f(λ^(k)): the mean of `f`, exact if `f` lies in the rule's space.

        In space ``symmetric`` `f` must not depend on the order of the eigenvalues, and is evaluated once for each
        representative. In space ``ordered`` `f` receives them in descending order, so ``x[:, 0]`` is the largest.

        Parameters
        ----------
        f : callable
            Takes the nodes, shape (M, N), and returns shape (M,) or (M, …).

        Returns
        -------
        float, complex or ndarray
            Shape ``f(nodes).shape[1:]``.

        Raises
        ------
        InputError
            `f` returned an array whose first axis is not the nodes.
        """
        return self._sum(self.weights, self._values(f))

    def estimate(self, f: Callable[[FloatArray], Any]) -> Estimate:
        """The mean of `f`, and its difference from the mean by the embedded weights, from one set of evaluations.

        The error is that of the embedded weights, so the value itself is usually much better than it says.

        Parameters
        ----------
        f : callable
            As for :meth:`average`.

        Returns
        -------
        Estimate
            ``value`` and ``error``, each as :meth:`average` returns it.

        Raises
        ------
        InputError
            The rule has no embedded weights, or `f` returned an array whose first axis is not the nodes.
        """
        second = self.embedded_weights
        values = self._values(f)
        value = self._sum(self.weights, values)
        return Estimate(value, abs(value - self._sum(second, values)))

    def _values(self, f: Callable[[FloatArray], Any]) -> NDArray[Any]:
        values = np.asarray(f(self.nodes))
        if values.shape[:1] != (len(self),):
            raise InputError(
                f"f must return one value per node, first axis {len(self)}",
                f"shape {values.shape}",
                "f receives all nodes at once, shape (M, N); reduce over the last axis.",
            )
        return values

    def _sum(self, weights: FloatArray, values: NDArray[Any]) -> Any:
        mean = np.tensordot(weights, values, axes=1)
        return mean.item() if mean.ndim == 0 else mean

    def verified(self, verification: Verification) -> Rule:
        """The same rule with a verification block."""
        return replace(self, verification=verification)


def _frozen(values: Sequence[Any]) -> FloatArray:
    array = np.array(values, dtype=np.float64)
    array.flags.writeable = False
    return array
