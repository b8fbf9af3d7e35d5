"""Means over the probability simplex: exact moments, cubature rules, proofs and tables.

Conventions, which hold everywhere in the package
-------------------------------------------------
==============  ==============================================================================================
quantity        convention
==============  ==============================================================================================
index           components, nodes and weights count from 0 in Python, from 1 in printed formulas (λ_1 … λ_N)
node            barycentric coordinates λ_i ≥ 0 with Σ λ_i = 1; arrays have shape ``(M, N)``
weight          sums to 1 over the rule; arrays have shape ``(M,)``
E[·]            always a mean: every measure has total mass 1
degree          largest total degree of the polynomials that a rule averages exactly
orbit           all different permutations of one node; its weight is shared equally among them
logarithm       natural; entropies are in nats unless bits are asked for
==============  ==============================================================================================
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

from simplexcub import hooks
from simplexcub.version import VERSION

__version__ = VERSION

# Loaded when first asked for, so that `import simplexcub` costs nothing and each use pays only for its own floor.
_HOME = {
    "Measure": "measures",
    "beta_ensemble": "measures",
    "bures": "measures",
    "bures_hall": "measures",
    "dirichlet": "measures",
    "flat": "measures",
    "hilbert_schmidt": "measures",
    "induced": "measures",
    "ordered": "measures",
    "orthogonal": "measures",
    "polynomial_density": "measures",
    "symplectic": "measures",
    "Rule": "rule",
    "KnownMean": "search",
    "chebyshev": "search",
    "embed": "search",
    "solve": "search",
    "verify": "verify",
    "draw": "picture",
    "Mean": "average",
    "average": "average",
    "distribution": "average",
    "exact_mean": "average",
    "lift": "average",
    "parse_expression": "average",
    "spectral_function": "average",
    "load": "table",
    "read": "table",
    "save": "table",
    "InputError": "errors",
    "NothingFound": "errors",
    "SimplexcubError": "errors",
    "TableError": "errors",
}

__all__ = [*_HOME, "__version__"]  # noqa: PLE0604 -- the names come from the table above


def _html(rule: Any) -> str:
    text: str = import_module("simplexcub.picture.notebook").html(rule)
    return text


hooks.html = _html


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module 'simplexcub' has no attribute {name!r}")
    value = getattr(import_module(f"simplexcub.{_HOME[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted(__all__)
