"""Rules for spectra against sampling, quasi-random sequences and conical products, at equal numbers of evaluations.

Run with ``python tests/benchmarks/spectra.py [PICTURE]``; it takes about a minute, and the picture needs matplotlib.

Entropy, largest eigenvalue λ1, −ln λ1, and exp(−5 Tr ρ²), over Hilbert–Schmidt (N = 3, 4, 8) and Bures (N = 3, 4), by
the shipped rules: `symmetric`; `ordered` for λ1, exact by construction, and −ln λ1; `entropic` for the entropy, exact
by construction. All take f at ordered spectra, each once, so an evaluation is a representative. Each rival has two
figures for each rule: how many times the rule's error it has after as many evaluations / how many times the evaluations
it takes for the rule's error. Errors below 1e-14 count as 1e-14. Where a figure is below 1 the rule is behind; these
are listed at the end.

- sampling: σ/√n, with σ from 20 000 density matrices;
- Sobol, Halton: scipy's scrambled sequences, mapped to the measure (`quasi_random` of `rivals.py`); root mean square
  error of the first n points over 8 scrambles, and the first n at which it reaches the rule's, up to 2^14;
- conical, chamber: products of Gauss–Jacobi rules on the simplex, and of flat ones on the chamber of ordered spectra,
  with the rest of the density as weight; the largest product of at most n points, and the fewest points from which on
  the error stays within the rule's, up to 200 000. Every point is an evaluation.

References: the entropy in closed form; λ1 by exact ordered moments, −ln λ1 by a fine product on the chamber, and so is
λ1 for Bures; both for Hilbert–Schmidt with N = 8 by the distribution of the largest eigenvalue of a complex Wishart
matrix (C. G. Khatri, Ann. Math. Stat. 35 (1964) 1807; from memory), which is first held against the others for N = 3
and 4; exp(−5 Tr ρ²) by its series in exact moments.
"""

from __future__ import annotations

import math
import sys
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import NamedTuple

import numpy as np
from averages import reference
from mpmath import mp, mpf
from rivals import SEQUENCES, FloatArray, conical_spectra, draws, quasi_random

import simplexcub as sc
from simplexcub.average.functions import spectral_function
from simplexcub.measures import Measure, bures, hilbert_schmidt
from simplexcub.rule import Rule

RATE = 5
CASES = (
    (hilbert_schmidt(3), False),
    (hilbert_schmidt(4), False),
    (hilbert_schmidt(8), False),
    (bures(3), True),
    (bures(4), True),
)
FUNCTIONS: dict[str, Callable[[FloatArray], FloatArray]] = {
    "entropy": spectral_function("von-neumann"),
    "λ1": spectral_function("largest"),
    "−ln λ1": spectral_function("min-entropy"),
    f"exp(−{RATE} Tr ρ²)": lambda x: np.asarray(np.exp(-RATE * (x**2).sum(axis=-1))),
}
ENTROPY, LARGEST, LOGARITHM, _ = FUNCTIONS
PLACES = {"symmetric": tuple(FUNCTIONS), "ordered": (LARGEST, LOGARITHM), "entropic": (ENTROPY,)}
RIVALS = ("sampling", *SEQUENCES, "conical", "chamber")
SHOWN = (4, 6, 8, 10, 12, 20)
ORDERED = ("largest", "min-entropy")
HIGHEST, SCRAMBLES, POINTS, MOST = 20, 8, 2**14, 200_000
RIVAL_COLOURS = ("#6d7787", "#8fc1b5", "#6b4c9a", "#c78a2b", "#7a4a2b")
MARKS = {"symmetric": ("o", "#1f3b5c"), "ordered": ("s", "#b5432a"), "entropic": ("^", "#f0b429")}
NOISE = 1e-14  # of float64 sums: errors below it count as this


class Curve(NamedTuple):
    """Errors by rising numbers of evaluations; `spread` where they go on as spread/√n."""

    counts: FloatArray
    errors: FloatArray
    spread: float | None = None

    def error_after(self, count: int) -> float:
        if self.spread is not None:
            return float(self.spread / math.sqrt(count))
        place = int(np.searchsorted(self.counts, count, side="right")) - 1
        return float(self.errors[place])

    def count_for(self, error: float, *, stays: bool) -> tuple[float, bool]:
        """Evaluations, and whether they suffice: else they are the most that were tried."""
        if self.spread is not None:
            return max(1.0, (self.spread / error) ** 2), True
        within = self.errors <= error
        if stays:
            within = np.logical_and.accumulate(within[::-1])[::-1]
        found = within.any()
        return float(self.counts[int(within.argmax()) if found else -1]), bool(found)


class Line(NamedTuple):
    case: int
    function: str
    space: str
    degree: int
    count: int
    error: float


def by_distribution(n: int) -> tuple[float, float]:
    """E[λ1] and E[−ln λ1] for Hilbert–Schmidt, from F(t) = P(x1 ≤ t) of the complex Wishart matrix.

    λ = x/T with T = Σ x independent of λ and of law Gamma(N²), so E[x1] = ∫ (1 − F) dt = N² E[λ1], and
    E[ln x1] = ln t_max − ∫ F/t dt = ψ(N²) + E[ln λ1], with t_max where 1 − F is below 1e-20.
    """
    nodes, weights = np.polynomial.legendre.leggauss(80)
    with mp.workdps(60):
        top, mean, logarithm = mpf(9 * n + 25), mpf(0), mpf(0)
        full = mp.fprod(mp.factorial(i) ** 2 for i in range(n))
        for node, weight in zip(nodes.tolist(), weights.tolist(), strict=True):
            t = top * (1 + mpf(node)) / 2
            gammas = [mp.gammainc(k + 1, 0, t) for k in range(2 * n - 1)]
            below = mp.det(mp.matrix([[gammas[i + j] for j in range(n)] for i in range(n)])) / full
            mean += weight * top / 2 * (1 - below)
            logarithm += weight * top / 2 * below / t
        return float(mean / n**2), float(mp.digamma(n**2) - mp.log(top) + logarithm)


def smooth_mean(measure: Measure) -> float:
    total, term, k = Fraction(0), Fraction(1), 0
    while term > Fraction(1, 10**17):
        total += term if k % 2 == 0 else -term
        k += 1
        term = Fraction(RATE**k, math.factorial(k)) * measure.power_sum_moment((2,) * k)
    return float(total)


def label_of(measure: Measure) -> str:
    return f"{'Bures' if measure.family == 'bures' else 'Hilbert–Schmidt'} N = {measure.N}"


def truths(measure: Measure) -> dict[str, float]:
    entropy, smooth = reference("von-neumann", measure)[0], smooth_mean(measure)
    if measure.N > 4:
        return dict(zip(FUNCTIONS, (entropy, *by_distribution(measure.N), smooth), strict=True))
    ordered = (reference(name, measure)[0] for name in ORDERED)
    return dict(zip(FUNCTIONS, (entropy, *ordered, smooth), strict=True))


def representatives(rule: Rule) -> tuple[FloatArray, FloatArray]:
    """Different ordered spectra among the nodes, and their weights."""
    spectra = -np.sort(-rule.nodes, axis=1)
    _, first, which = np.unique(spectra.round(12), axis=0, return_index=True, return_inverse=True)
    return spectra[first], np.bincount(which.ravel(), rule.weights)


def rules(measure: Measure) -> list[tuple[str, Rule]]:
    """Shipped rules by rising degree, each named by its space."""
    found: list[tuple[str, Rule]] = []
    for name, space in (("symmetric", "symmetric"), ("ordered", "ordered"), ("entropic", "all")):
        also = "entropy" if name == "entropic" else ()
        for degree in range(1, HIGHEST + 1):
            try:
                rule = sc.load(measure, degree=degree, space=space, also=also)
            except sc.NothingFound:
                break
            if rule.degree == degree:
                found.append((name, rule))
    return found


def ours(case: int, means: dict[str, float]) -> list[Line]:
    lines = []
    for space, rule in rules(CASES[case][0]):
        x, weights = representatives(rule)
        for name in PLACES[space]:
            error = abs(float(weights @ FUNCTIONS[name](x)) - means[name])
            lines.append(Line(case, name, space, rule.degree, len(x), max(error, NOISE)))
    return lines


def curves(measure: Measure, is_bures: bool, means: dict[str, float]) -> dict[tuple[str, str], Curve]:
    """By rival and function."""
    made: dict[tuple[str, str], Curve] = {}
    sample, _ = draws(measure, is_bures)
    counts = np.arange(1.0, POINTS + 1)
    for name, f in FUNCTIONS.items():
        spread = float(f(sample).std())
        made["sampling", name] = Curve(counts, spread / np.sqrt(counts), spread)
    for sequence in SEQUENCES:
        squares = {name: np.zeros(POINTS) for name in FUNCTIONS}
        for seed in range(SCRAMBLES):
            x = quasi_random(measure, is_bures, sequence, POINTS, seed)
            for name, f in FUNCTIONS.items():
                squares[name] += (f(x).cumsum() / counts - means[name]) ** 2
        for name in FUNCTIONS:
            made[sequence, name] = Curve(counts, np.sqrt(squares[name] / SCRAMBLES))
    for rival in ("conical", "chamber"):
        sizes = [1]
        while (larger := max(sizes[-1] + 1, round(sizes[-1] * 7 / 6))) ** (measure.N - 1) <= MOST:
            sizes.append(larger)
        errors: dict[str, list[float]] = {name: [] for name in FUNCTIONS}
        for size in sizes:
            x, weights = conical_spectra(measure.N, is_bures, size, chamber=rival == "chamber")
            for name, f in FUNCTIONS.items():
                value = float(weights @ f(x))
                errors[name].append(max(abs(value - means[name]), NOISE) if math.isfinite(value) else math.inf)
        for name in FUNCTIONS:
            made[rival, name] = Curve(np.array(sizes, dtype=np.float64) ** (measure.N - 1), np.array(errors[name]))
    return made


def ratios(line: Line, rival: str, curve: Curve) -> tuple[float, float, str]:
    """Errors after as many evaluations, evaluations for the same error, and both as text."""
    error = curve.error_after(line.count) / line.error
    count, reached = curve.count_for(line.error, stays=rival in ("conical", "chamber"))
    evaluations = count / line.count
    told = "–" if math.isinf(error) else f"{error:.2g}"
    return error, evaluations if reached else math.inf, f"{told} / {'' if reached else '>'}{evaluations:.2g}"


def main(picture: str | None) -> None:
    np.seterr(all="ignore")  # the density vanishes at the centre, the only point of the smallest product
    for n in (3, 4):
        means, otherwise = by_distribution(n), (reference(name, hilbert_schmidt(n))[0] for name in ORDERED)
        gaps = [f"{abs(a - b):.1e}" for a, b in zip(means, otherwise, strict=True)]
        print(f"two references, Hilbert–Schmidt N = {n}, differ by {gaps[0]} for E[λ1], {gaps[1]} for E[−ln λ1]")
    print("\nTimes the error after as many evaluations / times the evaluations for the same error ('>': not reached)")
    heads = "  ".join(f"{rival:>17}" for rival in RIVALS)
    print(f"{'measure':<21} {'function':<13} {'space':<9} {'degree':>6} {'evals':>5} {'error':>8}  {heads}")
    behind: list[str] = []
    lines: list[Line] = []
    others: list[dict[tuple[str, str], Curve]] = []
    for case, (measure, is_bures) in enumerate(CASES):
        means = truths(measure)
        others.append(curves(measure, is_bures, means))
        label = label_of(measure)
        fresh = sorted(ours(case, means), key=lambda line: list(FUNCTIONS).index(line.function))
        lines += fresh
        for line in fresh:
            told, lost = [], []
            for rival in RIVALS:
                error, evaluations, text = ratios(line, rival, others[-1][rival, line.function])
                told.append(f"{text:>17}")
                if min(error, evaluations) < 1:
                    lost.append(f"{rival} {text}")
            if lost:
                behind.append(f"{label}, {line.function}, {line.space}, degree {line.degree}: {'; '.join(lost)}")
            if line.degree in SHOWN:
                head = f"{label:<21} {line.function:<13} {line.space:<9} {line.degree:6d} {line.count:5d}"
                print(f"{head} {line.error:8.1e}  {'  '.join(told)}", flush=True)
    print(f"\n{len(lines)} means by rules against {len(RIVALS)} rivals; behind one or more of them in {len(behind)}:")
    print("\n".join(behind) or "none")
    if picture is not None:
        draw(lines, others, Path(picture))


def draw(lines: list[Line], others: list[dict[tuple[str, str], Curve]], picture: Path) -> None:
    """One panel for each function and measure."""
    try:
        from matplotlib.figure import Figure

        from simplexcub.picture import style
    except ImportError:
        print("matplotlib is not there: no picture")
        return

    def paint(figure: Figure) -> None:
        panels = figure.subplots(len(FUNCTIONS), len(CASES), sharex=True, sharey="row", squeeze=False)
        for row, name in enumerate(FUNCTIONS):
            for case, (measure, _) in enumerate(CASES):
                panel = panels[row][case]
                for colour, rival in zip(RIVAL_COLOURS, RIVALS, strict=True):
                    curve = others[case][rival, name]
                    every = np.unique(np.geomspace(1, len(curve.counts), 60).astype(int)) - 1
                    panel.plot(curve.counts[every], curve.errors[every], color=colour, linewidth=0.9, label=rival)
                for space, (shape, colour) in MARKS.items():
                    own = [line for line in lines if (line.case, line.function, line.space) == (case, name, space)]
                    x, y = [line.count for line in own], [line.error for line in own]
                    panel.plot(x, y, shape, color=colour, markersize=3.5, label=f"rules, {space}")
                panel.set(xscale="log", yscale="log", xlim=(0.8, 2e5))
                panel.grid(visible=True, color=style.MIST, linewidth=0.4)
                if row == 0:
                    panel.set_title(label_of(measure), fontsize=style.TEXT)
            panels[row][0].set_ylabel(f"error of the mean: {name}")
        for panel in panels[-1]:
            panel.set_xlabel("evaluations")
        handles, labels = panels[0][0].get_legend_handles_labels()
        figure.legend(handles, labels, ncols=len(labels), loc="lower center", frameon=False, fontsize=style.TEXT)
        figure.subplots_adjust(left=0.055, right=0.99, top=0.95, bottom=0.09, wspace=0.06, hspace=0.08)

    picture.write_bytes(style.drawn(11.5, 9.0, picture.suffix[1:] or "png", paint, dpi=150))
    print(f"drawn to {picture}")


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else None)
