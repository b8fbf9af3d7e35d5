"""Checking a rule: the wing that trusts nothing but printed decimals and shares no numerical code with the search."""

from __future__ import annotations

import sys
from types import ModuleType
from typing import Any

from simplexcub.verify.bounds import lower_bound
from simplexcub.verify.check import Progress, Report, verify
from simplexcub.verify.proof import prove
from simplexcub.verify.proof_result import Proof

__all__ = ["Progress", "Proof", "Report", "lower_bound", "prove", "verify"]


class _Wing(ModuleType):
    def __call__(self, *args: Any, **kwargs: Any) -> Report:
        return verify(*args, **kwargs)


# Importing this package puts it into `simplexcub` under the same name as the function; both must answer a call.
sys.modules[__name__].__class__ = _Wing
