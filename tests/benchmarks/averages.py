"""Means to 1e-3, 1e-6 and 1e-9 against what people do otherwise, as ratios inside one process.

Run with ``python tests/benchmarks/averages.py [PICTURE]``; it takes some minutes, and the picture needs matplotlib.

Five functions × (Hilbert–Schmidt, Bures) × N = 2, 3, 4. `average` is asked for the tolerance and has to find out by
itself when to stop. A tolerance counts as reached where the true error is within it. Sampling and Sobol are favoured:
they stop with the knowledge of the truth.

- numpy: random density matrices; draws n = (σ/tol)², at the measured time per draw (extrapolated above 10^5 draws);
- Sobol: scipy's scrambled sequence on the simplex by order statistics, with the density as weight; the fewest points
  from which on the true error stays below tol, powers of two up to 2^18;
- cubature: scipy.integrate.cubature of density · f and density on the cube (broken stick), absolute tolerance tol;
- nquad: scipy.integrate.nquad of the same with limits 0 … 1 − Σ, for at most 4 seconds;
- conical: products of Gauss–Jacobi rules for the Dirichlet part of the density, the rest as weight, with a sixth more
  nodes per axis each time until two values in a row agree to tol; up to 200 000 nodes.

Each time is the best of three runs, after a first one that fills caches.
"""

from __future__ import annotations

import sys

import numpy as np
from rivals import RIVALS, Cost, timed

from simplexcub.average.functions import exact_mean, spectral_function
from simplexcub.average.mean import average
from simplexcub.average.products import product_points
from simplexcub.measures import Measure, bures, hilbert_schmidt

NAMES = ("von-neumann", "largest", "fidelity", "renyi-2", "trace-distance")
TOLERANCES = (1e-3, 1e-6, 1e-9)
METHODS = tuple(RIVALS)


def reference(name: str, measure: Measure) -> tuple[float, float]:
    """The mean, and how far it can be trusted."""
    f = spectral_function(name)
    exact = exact_mean(f, measure)
    if exact is not None:
        return float(exact.value), 1e-15
    if name == "trace-distance":
        found = average(f, measure, tol=1e-11, max_evaluations=6_000_000)
        return found.value, found.error
    points, weights = product_points(measure, f.space, 48)
    return float(weights @ f(points)), 1e-12


def ours(name: str, measure: Measure, tol: float, truth: float) -> Cost:
    f = spectral_function(name)
    found, seconds = timed(lambda: average(f, measure, tol=tol))
    return (found.evaluations, seconds) if found.met and abs(found.value - truth) <= tol else None


def ratio(other: Cost, own: Cost, which: int) -> str:
    if own is None:
        return "–" if other is None else "lost"
    return "never" if other is None else f"{other[which] / own[which]:.3g}"


def main(picture: str | None) -> None:
    np.seterr(all="ignore")  # the others divide by zero on the boundary
    print("How many times the evaluations / the time of `average` the others take ('never': not reached)")
    heads = "  ".join(f"{m:>17}" for m in METHODS)
    print(f"{'measure':<22} {'function':<15} {'tol':>6} {'evaluations':>11} {'ms':>7}  {heads}")
    records, behind, lines = [], [], 0
    for n in (2, 3, 4):
        for measure, is_bures in ((hilbert_schmidt(n), False), (bures(n), True)):
            for name in NAMES:
                truth, trust = reference(name, measure)
                for tol in TOLERANCES:
                    label = f"{measure.family} N = {n}"
                    if trust > tol / 2:
                        print(f"{label:<22} {name:<15} {tol:6.0e}  no reference to this accuracy")
                        continue
                    own = ours(name, measure, tol, truth)
                    others = [method(name, measure, is_bures, tol, truth) for method in RIVALS.values()]
                    lines += 1
                    shown = "  ".join(f"{ratio(o, own, 0)} / {ratio(o, own, 1)}".rjust(17) for o in others)
                    spent = f"{own[0]:11.0f} {own[1] * 1e3:7.2f}" if own else f"{'not met':>11} {'':>7}"
                    print(f"{label:<22} {name:<15} {tol:6.0e} {spent}  {shown}", flush=True)
                    for method, other in zip(METHODS, others, strict=True):
                        for which, what in ((0, "evaluations"), (1, "time")):
                            if other is not None and (own is None or other[which] < own[which]):
                                behind.append(f"{label}, {name}, {tol:g}: {method} in {what}")
                    records.append((label, name, tol, own, others))
    print(f"\n{lines} lines against {len(METHODS)} methods; `average` is behind in these:")
    print("\n".join(behind) or "none")
    if picture is not None:
        draw(records, picture)


def draw(records: list[tuple[str, str, float, Cost, list[Cost]]], picture: str) -> None:
    try:
        import matplotlib
    except ImportError:
        print("matplotlib is not there: no picture")
        return
    matplotlib.use("Agg")
    from matplotlib import pyplot

    figure, panels = pyplot.subplots(1, len(TOLERANCES), figsize=(13, 4), sharey=True)
    for panel, tol in zip(panels, TOLERANCES, strict=True):
        for k, method in enumerate(("average", *METHODS)):
            costs = [own if k == 0 else others[k - 1] for _, _, t, own, others in records if t == tol]
            reached = np.sort([cost[1] for cost in costs if cost is not None])
            panel.step(reached * 1e3, np.arange(1, len(reached) + 1) / len(costs), where="post", label=method)
        panel.set(xscale="log", title=f"error {tol:g}", xlabel="milliseconds")
    panels[0].set_ylabel("share of the means reached")
    panels[0].legend(fontsize=8)
    figure.tight_layout()
    figure.savefig(picture)
    print(f"drawn to {picture}")


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else None)
