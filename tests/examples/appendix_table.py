"""An appendix table: mean purity, entropy and largest eigenvalue over induced measures.

The scenario is invented: a paper on random marginals needs the three means for N-level systems with environments of K
levels, exactly, and a reader wants to see them checked by quadrature.
"""

from __future__ import annotations

import simplexcub as sc

SIZES = ((2, 2), (2, 3), (2, 4), (3, 3), (3, 4), (4, 4))
NAMES = ("purity", "von-neumann", "largest")
TOLERANCE = 1e-9


def main() -> None:
    print("N  K  purity         entropy (nats)           largest eigenvalue")
    for n, k in SIZES:
        measure = sc.induced(n, k)
        cells = []
        for name in NAMES:
            f = sc.spectral_function(name)
            # The lambda hides the name, so that purity too is averaged by quadrature.
            found = sc.average(lambda x, f=f: f(x), measure, tol=TOLERANCE, space=f.space)
            exact = sc.exact_mean(f, measure)
            agrees = "" if abs(found.value - float(exact.value)) <= found.error <= TOLERANCE else " ?"
            cells.append(f"{exact.fraction} = {float(exact.value):.4f}{agrees}")
        print(f"{n}  {k}  {cells[0]:<13}  {cells[1]:<23}  {cells[2]}")


if __name__ == "__main__":
    main()
