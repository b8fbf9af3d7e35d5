"""The error tree. Every error carries what a program needs to react, and reads as one line for a person.

A message names the value, the rule it broke and the remedy, e.g. ``degree must be at least 1; got -3``.
All classes keep their constructor arguments in ``args``, so they survive pickling between processes.
"""

from __future__ import annotations


class SimplexcubError(Exception):
    """Base of every error that the package raises on purpose."""


class InputError(SimplexcubError, ValueError):
    """A value that the caller can mend; the command line ends with status 2.

    Parameters
    ----------
    rule : str
        What must hold, naming the quantity, e.g. ``"degree must be at least 1"``.
    value : object
        What was given instead.
    remedy : str, optional
        The next step.
    """

    def __init__(self, rule: str, value: object, remedy: str = "") -> None:
        super().__init__(rule, value, remedy)
        self.rule = rule
        self.value = value
        self.remedy = remedy

    def __str__(self) -> str:
        shown = str(self.value)
        if len(shown) > 120:
            shown = shown[:117] + "..."
        return f"{self.rule}; got {shown}" + (f". {self.remedy}" if self.remedy else "")


class TableError(InputError):
    """A file that is not a readable, untouched table of nodes and weights."""


class NothingFound(SimplexcubError):
    """The search ended without a rule; the command line ends with status 1.

    Parameters
    ----------
    wanted : str
        What was looked for.
    tried : str
        How far the search went.
    remedy : str
        The next step.
    """

    def __init__(self, wanted: str, tried: str, remedy: str) -> None:
        super().__init__(wanted, tried, remedy)
        self.wanted = wanted
        self.tried = tried
        self.remedy = remedy

    def __str__(self) -> str:
        return f"no {self.wanted} found: {self.tried}. {self.remedy}"
