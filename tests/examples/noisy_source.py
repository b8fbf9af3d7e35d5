"""The entropy of a noisy source, known only to emit qutrits, with the Bures measure as prior.

The scenario is invented. A source sends three-level systems whose state nobody has measured. Before the first
measurement the Bures measure stands for what is known. How mixed will the states be, how far do they scatter, and how
often is the entropy below one bit?
"""

from __future__ import annotations

import simplexcub as sc

PRIOR = sc.bures(3)


def main() -> None:
    entropy = sc.spectral_function("von-neumann", unit="bits")
    largest = sc.spectral_function("largest")
    mean = sc.average(entropy, PRIOR, tol=1e-9)
    print(f"mean entropy   {mean.value:.6f} bits, estimated error below 1e-9: {mean.error < 1e-9}")
    print(f"in closed form {mean.exact.form} = {float(mean.exact.value):.6f} bits")
    spread = sc.distribution([entropy, largest], PRIOR, points=[1.0], samples=50_000, tol=1e-7)
    deviation = spread.variance**0.5
    print(f"scatter        {deviation[0]:.6f} bits")
    print(f"largest weight {spread.mean[1]:.6f}, scatter {deviation[1]:.6f}")
    print(f"correlation    {spread.covariance[0, 1] / deviation[0] / deviation[1]:.6f}")
    print(f"below one bit  {spread.cdf[0, 0]:.3f} ± {spread.cdf_error[0, 0]:.3f} (three standard errors)")


if __name__ == "__main__":
    main()
