"""What can be seen on the printed decimals without any moment: sums, signs, and the claims of symmetry and orbits.

Each check takes exact integers and gives sentences, one for each thing that is wrong, none where all is well.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from fractions import Fraction

from simplexcub.errors import InputError
from simplexcub.measures import Dirichlet
from simplexcub.rule import Orbit, Rule
from simplexcub.symmetry import Group, distinct_permutations, named_group, orbit_size
from simplexcub.verify.printed import Printed, parse_decimal
from simplexcub.verify.residuals import short


def is_positive(printed: Printed) -> bool:
    """Whether every weight is above 0."""
    return all(w > 0 for w in printed.weights)


def is_invariant(printed: Printed, group: Group | None = None) -> bool:
    """Whether the printed nodes, with their weights, are the same set after every permutation in `group` (S_N)."""
    generators = (group or named_group("full", len(printed.nodes[0]))).generators
    weighted = list(zip(printed.nodes, printed.weights, strict=True))
    listed = Counter(weighted)
    return all(Counter((tuple(x[i] for i in g), w) for x, w in weighted) == listed for g in generators)


def weight_faults(printed: Printed, *, equal: bool) -> Iterator[str]:
    """Σ w = 1 to the printed digits; all weights the same where that is claimed."""
    excess = Fraction(sum(printed.weights) - printed.one, printed.one)
    if abs(excess) > printed.uncertainty(printed.weight_units):
        yield f"the weights sum to {_near_one(excess)}, not to 1"
    if equal and len(set(printed.weights)) > 1:
        low, high = min(printed.weights), max(printed.weights)
        spread = short(Fraction(high - low, printed.one))
        yield f"equal weights are claimed, but the printed ones differ by up to {spread}"


def fixed_shares(rule: Rule, printed: Printed, places: Sequence[int]) -> tuple[Fraction, ...] | None:
    """The exact weights of the nodes at `places` where equal or integer weights are claimed and printed, else None."""
    if rule.equal_weights and len(set(printed.weights)) == 1:
        return (Fraction(1, len(rule)),) * len(places)
    if rule.integer_weights and not any(integer_faults(rule, printed)):
        total = sum(rule.integer_weights)
        return tuple(Fraction(rule.integer_weights[k], total) for k in places)
    return None


def integer_faults(rule: Rule, printed: Printed) -> Iterator[str]:
    """Weights in proportion to the integers that are claimed, to the printed digits."""
    total = sum(rule.integer_weights)
    units = zip(rule.integer_weights, printed.weights, printed.weight_units, strict=False)
    for k, (integer, weight, unit) in enumerate(units, 1):
        off = abs(Fraction(integer, total) - Fraction(weight, printed.one))
        if off * 10**printed.digits > Fraction(float(unit)):
            yield f"weight {k} is claimed to be {integer}/{total}, but the printed one is off by {short(off)}"
            return


def node_faults(printed: Printed) -> Iterator[str]:
    """Every node on the closed simplex: coordinates ≥ 0, Σ λ_i = 1 to the printed digits."""
    faults = []
    for k, (node, units) in enumerate(zip(printed.nodes, printed.node_units, strict=True), 1):
        excess = Fraction(sum(node) - printed.one, printed.one)
        if min(node) < 0:
            i = node.index(min(node)) + 1
            faults.append(f"λ{i} of node {k} is -{short(Fraction(-min(node), printed.one))}")
        elif abs(excess) > printed.uncertainty(units):
            faults.append(f"the coordinates of node {k} sum to {_near_one(excess)}, not to 1")
    if len(faults) == 1:
        yield f"a node is off the simplex: {faults[0]}"
    elif faults:
        yield f"{len(faults)} of {len(printed.nodes)} nodes are off the simplex, the first because {faults[0]}"


def claim_faults(rule: Rule, printed: Printed) -> Iterator[str]:
    """The digits, symmetry, order and orbits that the rule claims, against the decimals."""
    if rule.digits > printed.digits:
        yield f"{rule.digits} digits claimed, but the decimals carry at most {printed.digits}"
    if rule.space != "all":
        what = "stands for its orbit" if rule.space == "symmetric" else "is an ordered spectrum"
        for k, node in enumerate(printed.nodes, 1):
            if list(node) != sorted(node, reverse=True):
                yield f"node {k} {what}, but its coordinates are not in descending order"
                break
    if rule.space != "symmetric":
        yield from _symmetry_faults(rule, printed)
    yield from integer_faults(rule, printed)
    if rule.orbits:
        yield from _orbit_faults(rule, printed)


def _symmetry_faults(rule: Rule, printed: Printed) -> Iterator[str]:
    alpha = rule.measure.alpha if isinstance(rule.measure, Dirichlet) else ()
    try:
        group = named_group(rule.symmetry, rule.measure.N, alpha)
    except InputError as error:
        yield f"symmetry {rule.symmetry} is claimed, which cannot be checked: {error}"
        return
    if not is_invariant(printed, group):
        yield f"symmetry {rule.symmetry} is claimed, but the printed nodes and weights are not invariant under it"


def _near_one(excess: Fraction) -> str:
    return f"1 {'+' if excess > 0 else '-'} {short(abs(excess))}"


def _orbit_faults(rule: Rule, printed: Printed) -> Iterator[str]:
    n, representatives = rule.measure.N, rule.space == "symmetric"
    for k, orbit in enumerate(rule.orbits, 1):
        if (
            len(orbit.values) != len(orbit.multiplicities)
            or sum(orbit.multiplicities) != n
            or min(orbit.multiplicities) < 1
        ):
            yield f"orbit {k} must have one multiplicity per value, with sum {n}; it has {orbit.multiplicities}"
            return
    sizes = [1 if representatives else orbit_size(orbit.multiplicities) for orbit in rule.orbits]
    if sum(sizes) != len(rule):
        yield f"the orbits expand to {sum(sizes)} nodes, but {len(rule)} are listed"
        return
    try:
        expanded = [_expand(orbit, k, printed.places, representatives) for k, orbit in enumerate(rule.orbits, 1)]
    except InputError as error:
        yield str(error)
        return
    if Counter(node for nodes, _ in expanded for node in nodes) != Counter(printed.nodes):
        yield "the orbits do not expand to the listed nodes"
        return
    listed: dict[tuple[Fraction | int, ...], tuple[int, float]] = {
        node: (w, u) for node, w, u in zip(printed.nodes, printed.weights, printed.weight_units, strict=True)
    }
    for k, ((nodes, weight), size) in enumerate(zip(expanded, sizes, strict=True), 1):
        for node in nodes:
            w, unit = listed[node]
            off = abs(weight / size - Fraction(w, printed.one))
            # The unit of the orbit's weight is up to ten times its size times that of the share.
            if off > 11 * Fraction(float(unit)) / 10**printed.digits:
                yield f"the weight of orbit {k} is not that of its listed nodes: a share is off by {short(off)}"
                return


def _expand(orbit: Orbit, k: int, places: int, representatives: bool) -> tuple[list[tuple[Fraction, ...]], Fraction]:
    """The orbit's nodes in the table's units, and its weight."""
    values = [_fraction(text, f"value of orbit {k}") * 10**places for text in orbit.values]
    coordinates = [v for v, m in zip(values, orbit.multiplicities, strict=True) for _ in range(m)]
    if representatives:
        return [tuple(sorted(coordinates, reverse=True))], _fraction(orbit.weight, f"weight of orbit {k}")
    labels = [j for j, m in enumerate(orbit.multiplicities) for _ in range(m)]
    nodes = [tuple(values[j] for j in order) for order in distinct_permutations(labels)]
    return nodes, _fraction(orbit.weight, f"weight of orbit {k}")


def _fraction(text: str, name: str) -> Fraction:
    mantissa, places = parse_decimal(text, name)
    return Fraction(mantissa, 10**places)
