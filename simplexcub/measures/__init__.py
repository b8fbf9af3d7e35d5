"""The measures that are averaged over. Every one is a probability measure: E[1] = 1.

A measure knows its exact moments by two routes or more, its density, how to sample itself, and how it reads in a table.
"""

from __future__ import annotations

from simplexcub.measures.base import FloatArray, Measure, Rational
from simplexcub.measures.beta import BetaEnsemble
from simplexcub.measures.build import (
    FAMILIES,
    beta_ensemble,
    bures,
    bures_hall,
    dirichlet,
    flat,
    from_parameters,
    hilbert_schmidt,
    induced,
    orthogonal,
    symplectic,
)
from simplexcub.measures.chamber import Chamber
from simplexcub.measures.dirichlet import Dirichlet
from simplexcub.measures.ordered import Ordered, ordered
from simplexcub.measures.polynomial import PolynomialDensity, polynomial_density
from simplexcub.measures.spectra import BuresHall, Induced, Spectrum

__all__ = [
    "FAMILIES",
    "BetaEnsemble",
    "BuresHall",
    "Chamber",
    "Dirichlet",
    "FloatArray",
    "Induced",
    "Measure",
    "Ordered",
    "PolynomialDensity",
    "Rational",
    "Spectrum",
    "beta_ensemble",
    "bures",
    "bures_hall",
    "dirichlet",
    "flat",
    "from_parameters",
    "hilbert_schmidt",
    "induced",
    "ordered",
    "orthogonal",
    "polynomial_density",
    "symplectic",
]
