"""Applying rules: means of functions of a spectrum, with what is known about their error."""

from __future__ import annotations

import sys
from types import ModuleType
from typing import Any

from simplexcub.average.expression import Expression, parse_expression
from simplexcub.average.functions import SpectralFunction, exact_mean, spectral_function
from simplexcub.average.mean import Mean, average
from simplexcub.average.spread import Distribution, distribution
from simplexcub.average.states import StateRule, lift

__all__ = [
    "Distribution",
    "Expression",
    "Mean",
    "SpectralFunction",
    "StateRule",
    "average",
    "distribution",
    "exact_mean",
    "lift",
    "parse_expression",
    "spectral_function",
]


class _Room(ModuleType):
    def __call__(self, *args: Any, **kwargs: Any) -> Mean:
        return average(*args, **kwargs)


# Importing this package puts it into `simplexcub` under the same name as the function; both must answer a call.
sys.modules[__name__].__class__ = _Room
