"""Which symmetries a search tries, and whether the measure has them."""

from __future__ import annotations

from math import comb, factorial

from simplexcub.errors import InputError
from simplexcub.measures import Dirichlet, Measure
from simplexcub.symmetry import Group, Spectra, named_group

# Node counts measured over degrees 3 to 12: few symmetries first, since that is where the fewest nodes were found.
_PROMISE = {
    3: ("cyclic", "stabiliser", "none", "full"),
    4: ("cyclic", "klein", "dihedral", "stabiliser", "none", "full"),
}
_PROMISE_ELSE = ("stabiliser", "none", "full")

_MOST_COMPONENTS = 10
_MOST_FULL, _MOST = 600, 2000  # polynomials, beyond which a search would take hours to set up or fill the memory


def within_reach(group: Group, degree: int) -> bool:
    """Whether the polynomials that such a search works on are few enough."""
    if isinstance(group, Spectra):
        return True
    if group.n > _MOST_COMPONENTS:
        return False
    count = comb(degree + group.n - 1, group.n - 1)
    return count // factorial(group.n) <= _MOST_FULL if group.is_full else count <= _MOST


def groups_for(measure: Measure, symmetry: str) -> list[Group]:
    """The groups to search with, each checked to leave the measure unchanged."""
    # A measure that is neither symmetric nor Dirichlet may have no symmetry at all: every component is told apart.
    labels: tuple[object, ...] = (0,) * measure.N
    if not measure.is_symmetric:
        labels = measure.alpha if isinstance(measure, Dirichlet) else tuple(range(measure.N))
    own = "full" if measure.is_symmetric else "alpha" if isinstance(measure, Dirichlet) else "none"
    if symmetry == "best":
        names = _PROMISE.get(measure.N, _PROMISE_ELSE) if measure.is_symmetric else dict.fromkeys((own, "none"))
        return [named_group(name, measure.N, labels) for name in names]
    group = named_group(own if symmetry == "full" else symmetry, measure.N, labels)
    if any(labels[i] != labels[j] for g in group.generators for i, j in enumerate(g)):
        raise InputError(
            f"symmetry must leave {measure} unchanged", symmetry, "Use full (components of equal alpha) or none."
        )
    return [group]
