"""Errors of entropic rules beside plain ones with as many nodes: ``python tests/benchmarks/entropic.py``.

The functions are the von Neumann entropy, which the entropic rule averages exactly, and two that it does not: the
Rényi entropy of order 1/2 and the variance of −ln λ (the capacity of entanglement). Their means come from a conical
product of high degree, good to about 1e-5; the entropy's is exact.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

import simplexcub as sc
from simplexcub.average.functions import spectral_function
from simplexcub.search import product_rule

Array = NDArray[np.float64]


def capacity(x: Array) -> Array:
    """Σ λ ln² λ − S²."""
    return np.asarray((x * np.log(x) ** 2).sum(axis=1) - spectral_function("von-neumann")(x) ** 2)


FUNCTIONS = {
    "von Neumann": spectral_function("von-neumann"),
    "Rényi 1/2": spectral_function("renyi-1/2"),
    "capacity": capacity,
}


def main() -> None:
    """Print the table as Markdown."""
    print("| measure | rule | nodes | " + " | ".join(FUNCTIONS) + " |")
    print("|---|---|---|" + "---|" * len(FUNCTIONS))
    for measure in (sc.flat(3), sc.hilbert_schmidt(3)):
        reference = product_rule(measure, 255, digits=20)
        means = {name: reference.average(f) for name, f in FUNCTIONS.items()}
        means["von Neumann"] = float(measure.entropy().value(20))
        entropic = sc.load(measure, degree=6, also="entropy")
        plain = [sc.load(measure, degree=t, symmetry="full") for t in range(1, 21)]
        rival = max((r for r in plain if len(r) <= len(entropic)), key=lambda r: r.degree)
        for what, rule in (("plain", rival), ("with entropy", entropic)):
            errors = [f"{abs(rule.average(f) - means[name]):.0e}" for name, f in FUNCTIONS.items()]
            print(f"| {measure} | {what}, degree {rule.degree} | {len(rule)} | " + " | ".join(errors) + " |")


if __name__ == "__main__":
    main()
