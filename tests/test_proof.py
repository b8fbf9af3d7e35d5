"""The certificate: it holds for published and shipped rules, and it refuses what is no rule, for the right reason."""

import math
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction

import numpy as np
import pytest
from mpmath import mp, mpf

from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError
from simplexcub.measures import bures, dirichlet, flat, hilbert_schmidt
from simplexcub.rounded import rule_from_orbits
from simplexcub.rule import Provenance, Rule
from simplexcub.table import read
from simplexcub.table.formats import render
from simplexcub.table.reading import parse
from simplexcub.table.shipped import folder
from simplexcub.verify import prove, verify
from simplexcub.verify.printed import read_printed
from simplexcub.verify.proof_newton import NotProven, choose_unknowns, invert
from simplexcub.verify.proof_orbits import find_structure
from simplexcub.verify.proof_result import round_up
from simplexcub.verify.proof_snap import symmetrised
from simplexcub.verify.proof_system import MonomialSystem, PowerSumSystem

BY_HAND = Provenance("none", 0, "2026-01-01", "typed in")
TABLES = folder()


def table(name):
    return read(TABLES / f"{name}.json")


def typed(measure, degree, nodes, weights, digits=30, **claims):
    """A rule from exact fractions or mpf numbers."""
    printed = tuple(tuple("0" if x == 0 else to_decimal(x, digits) for x in node) for node in nodes)
    claims = {"symmetry": "none", "digits": digits, **claims}
    return Rule(measure, degree, printed, tuple(to_decimal(w, digits) for w in weights), BY_HAND, **claims)


def radon(digits=50):
    """J. Radon, Monatshefte für Mathematik 52 (1948) 286: seven nodes, degree 5."""
    with mp.workdps(digits + 20):
        orbits = [((3,), [mpf(1) / 3], mpf(9) / 40)]
        for root in (mp.sqrt(15), -mp.sqrt(15)):
            b = (6 + root) / 21
            orbits.append(((1, 2), [1 - 2 * b, b], 3 * (155 + root) / 1200))
        return rule_from_orbits(flat(3), 5, orbits, digits=digits, provenance=BY_HAND)


def gauss_jacobi(a, b):
    """One node, degree 1: the mean of a two-component Dirichlet measure."""
    m = Fraction(a, a + b)
    return typed(dirichlet([a, b]), 1, [(m, 1 - m)], [Fraction(1)])


def two_point_gauss(alpha):
    """Two nodes, degree 3, for Dirichlet(α1, α2): zeros of the second orthogonal polynomial of the Beta measure."""
    a, b = alpha
    mean = [mpf(1)]
    with mp.workdps(60):
        for k in range(3):
            mean.append(mean[-1] * (a + k) / (a + b + k))
        c, s = mp.lu_solve(mp.matrix([[1, mean[1]], [mean[1], mean[2]]]), mp.matrix([-mean[2], -mean[3]]))
        root = mp.sqrt(s * s / 4 - c)
        x = [-s / 2 - root, -s / 2 + root]
        w = (mean[1] - x[1]) / (x[0] - x[1])
        return typed(dirichlet(alpha), 3, [(x[0], 1 - x[0]), (x[1], 1 - x[1])], [w, 1 - w], digits=40)


@pytest.mark.parametrize(
    "name",
    [
        "flat/N2/all-full-t21-11",
        "flat/N3/all-full-t03-6",
        "flat/N3/all-full-t10-25",
        "flat/N4/all-full-t08-46",
        "hilbert-schmidt/N2/all-full-t15-8",
        "hilbert-schmidt/N3/all-full-t13-39",
        "hilbert-schmidt/N4/all-full-t07-38",
    ],
)
def test_shipped_rules_are_proven_within_their_last_digits(name):
    proof = prove(table(name))
    assert proof.holds
    assert proof.positive
    assert Decimal(proof.radius) < Decimal("2e-50")
    assert Decimal(proof.contraction) < Decimal("1e-60")
    assert proof.units < 3
    assert len(proof.fixed) == proof.unknowns - proof.equations


def test_the_proven_rule_is_exact_where_the_printed_one_is_not():
    rule = radon(20)
    proof = prove(rule)
    a = max(max(node) for node in proof.nodes)
    # (9 + 2 √15)/21 is the largest coordinate; its square root part is tested in exact fractions.
    assert abs((21 * a - 9) ** 2 - 60) < Fraction(1, 10**38)
    assert Decimal("1e-22") < Decimal(proof.radius) < Decimal("1e-20")


def test_the_radius_covers_every_printed_number():
    rule, proof = radon(15), prove(radon(15))
    printed = [Fraction(x) for node in rule.node_decimals for x in node] + [Fraction(w) for w in rule.weight_decimals]
    exact = [x for node in proof.nodes for x in node] + list(proof.weights)
    farthest = max(abs(p - e) for p, e in zip(printed, exact, strict=True))
    assert Fraction(Decimal(proof.radius)) >= farthest
    assert Fraction(Decimal(proof.radius)) <= farthest * Fraction(11, 10) + Fraction(1, 10**30)


def test_a_shift_in_the_twentieth_digit_widens_the_radius_and_is_a_fault():
    rule = radon()
    nodes = [list(node) for node in rule.node_decimals]
    weights = [
        str(Decimal(w) + Decimal(shift))
        for w, shift in zip(rule.weight_decimals, ["3e-20"] + ["-5e-21"] * 6, strict=True)
    ]
    moved = replace(rule, node_decimals=tuple(map(tuple, nodes)), weight_decimals=tuple(weights), orbits=())
    report = verify(moved, prove=True)
    assert not report.holds
    assert report.proof.holds
    assert Decimal("2.9e-20") < Decimal(report.proof.radius) < Decimal("3.2e-20")


def test_small_fractions_are_proven_in_plain_arithmetic():
    third, half = Fraction(1, 3), Fraction(1, 2)
    midpoints = [(half, half, Fraction(0)), (half, Fraction(0), half), (Fraction(0), half, half)]
    proof = prove(typed(flat(3), 2, midpoints, [third] * 3))
    assert (proof.method, proof.holds, proof.group) == ("rational arithmetic", True, "full")
    assert proof.weights == (third,) * 3
    assert proof.contraction == "0"


def test_one_more_degree_than_a_rational_rule_has_is_not_proven():
    third, half = Fraction(1, 3), Fraction(1, 2)
    midpoints = [(half, half, Fraction(0)), (half, Fraction(0), half), (Fraction(0), half, half)]
    proof = prove(typed(flat(3), 3, midpoints, [third] * 3))
    assert not proof.holds
    assert proof.reason == "there are more equations (3) than unknowns (1)"
    assert proof.record()["holds"] is False
    assert "reason" in proof.record()


def test_zeros_stay_zero():
    rule = table("hilbert-schmidt/N4/all-full-t02-4")
    proof = prove(rule)
    for shown, exact in zip(rule.node_decimals, proof.nodes, strict=True):
        assert [Decimal(x) == 0 for x in shown] == [x == 0 for x in exact]


def test_a_measure_without_symmetry_has_its_rules_proven():
    for rule in (gauss_jacobi(1, 2), two_point_gauss((1, 2)), two_point_gauss((3, 1))):
        proof = prove(rule)
        assert proof.holds
        assert proof.group == "none"
    assert proof.equations == 4


def test_a_rule_without_symmetry_for_a_symmetric_measure():
    """A Gauss rule times itself on the triangle: nodes (x, (1 − x) y), degree 3, fixed by no permutation."""
    s, t = two_point_gauss((1, 2)), two_point_gauss((1, 1))
    nodes, weights = [], []
    with mp.workdps(60):
        for (x, _), u in zip(s.node_decimals, s.weight_decimals, strict=True):
            for (y, _), v in zip(t.node_decimals, t.weight_decimals, strict=True):
                first, second = mpf(x), (1 - mpf(x)) * mpf(y)
                nodes.append((first, second, 1 - first - second))
                weights.append(mpf(u) * mpf(v))
        rule = typed(flat(3), 3, nodes, weights, digits=36)
    proof = prove(rule)
    assert proof.holds
    assert proof.group in ("none", "a group of order 2", "stabiliser")
    assert len(proof.fixed) == proof.unknowns - proof.equations
    assert Decimal(proof.radius) < Decimal("1e-34")


def test_equal_weights_stay_equal():
    a = (1 + mp.sqrt(mpf(1) / 3)) / 2
    with mp.workdps(60):
        a = (1 + 1 / mp.sqrt(mpf(3))) / 2
        rule = typed(flat(2), 3, [(a, 1 - a), (1 - a, a)], [Fraction(1, 2)] * 2, digits=40, equal_weights=True)
    proof = prove(rule)
    assert proof.holds
    assert proof.weights == (Fraction(1, 2),) * 2
    assert (proof.equations, proof.unknowns) == (1, 1)


def test_space_symmetric_counts_representatives():
    rule = radon()
    firsts = {
        tuple(sorted(node, key=Decimal, reverse=True)): w
        for node, w in zip(rule.node_decimals, rule.weight_decimals, strict=True)
    }
    sizes = [1, 3, 3]
    weights = tuple(to_decimal(Fraction(w) * s, 50) for w, s in zip(firsts.values(), sizes, strict=True))
    short = Rule(flat(3), 5, tuple(firsts), weights, BY_HAND, space="symmetric", digits=50)
    proof = prove(short)
    assert proof.holds
    assert (proof.equations, proof.unknowns) == (5, 5)
    assert Decimal(proof.radius) < Decimal("3e-50")


def test_nonsense_near_no_rule_is_refused():
    rng = np.random.default_rng(3)
    points = rng.dirichlet(np.ones(3), size=12)
    nodes = [tuple(Fraction(Decimal(repr(float(x)))) for x in p) for p in points]
    rule = typed(flat(3), 4, nodes, [Fraction(1, 12)] * 12, digits=16)
    proof = prove(rule)
    # A rule far away is no rule nearby: either nothing is proven or the radius says how far.
    assert not proof.holds or Decimal(proof.radius) > Decimal("1e-3")


def test_a_singular_jacobian_is_named():
    """Twice the same node: its two weights cannot be told apart, nor three equations be solved with what is left."""
    nodes = [(Fraction(1, 2), Fraction(1, 2))] * 2
    rule = typed(flat(2), 2, nodes, [Fraction(1, 2)] * 2)
    proof = prove(rule)
    assert not proof.holds
    assert "singular" in proof.reason


def test_a_negative_weight_is_proven_but_not_called_positive():
    centre, third = (Fraction(1, 3),) * 3, Fraction(25, 48)
    corners = [tuple(Fraction(3 if i == j else 1, 5) for j in range(3)) for i in range(3)]
    rule = typed(flat(3), 3, [centre, *corners], [Fraction(-9, 16), third, third, third])
    proof = prove(rule)
    assert proof.holds
    assert not proof.positive


def test_the_proof_travels_with_the_table():
    rule = radon()
    block = verify(rule, prove=True).verification
    assert verify(rule).verification.proof is None
    assert set(block.proof) >= {"method", "radius", "holds"}
    shown = rule.verified(block)
    assert parse(render(shown, "json"), "file").verification == block
    assert parse(render(shown, "csv"), "file").verification == block
    assert "an exact rule lies within" in " ".join(render(shown, "text").split())


def test_what_the_file_says_about_its_proof_is_not_believed():
    rule = radon()
    found = verify(rule).verification
    forged = rule.verified(replace(found, proof={"method": "trust me", "radius": "0", "holds": True}))
    assert verify(forged, prove=True).verification.proof["radius"] == prove(rule).radius != "0"


def test_other_spaces_and_measures_are_refused():
    rule = radon()
    with pytest.raises(InputError, match="N = 3"):
        prove(rule, measure=flat(4))
    with pytest.raises(InputError, match=r"ordered moments .* got bures\(N=3\)"):
        prove(replace(rule, space="ordered"), measure=bures(3))


def test_radon_is_no_rule_for_another_measure():
    assert not prove(radon(), measure=hilbert_schmidt(3)).holds or Decimal(
        prove(radon(), measure=hilbert_schmidt(3)).radius
    ) > Decimal("1e-3")


# Parts


def rotated(measure=flat(3)):  # noqa: B008 -- measures are frozen
    x = ("0.1", "0.2", "0.7")
    nodes = (x, (x[1], x[2], x[0]), (x[2], x[0], x[1]))
    return Rule(measure, 1, nodes, ("0.25", "0.25", "0.25"), BY_HAND, symmetry="none", digits=2)


def structure_of(rule):
    return find_structure(read_printed(rule), rule.measure, rule.space)


def test_groups_are_found_on_the_decimals():
    assert structure_of(radon()).group == "full"
    assert structure_of(rotated()).group == "cyclic"
    assert structure_of(rotated(dirichlet([1, 1, 2]))).group == "none"
    one_changed = replace(rotated(), weight_decimals=("0.25", "0.25", "0.5"))
    assert structure_of(one_changed).group == "none"
    pair = Rule(flat(3), 1, (("0.1", "0.2", "0.7"), ("0.2", "0.1", "0.7")), ("0.5", "0.5"), BY_HAND, digits=2)
    assert structure_of(pair).group == "stabiliser"
    assert len(structure_of(pair).orbits) == 1


def test_zeros_are_not_free_and_equal_coordinates_move_together():
    rule = Rule(flat(4), 1, (("0", "0", "0.5", "0.5"),), ("1",), BY_HAND, space="symmetric", digits=2)
    (orbit,) = structure_of(rule).orbits
    assert orbit.free == ()
    assert sorted(orbit.multiplicities) == [2, 2]


@pytest.mark.parametrize("kind", ["full", "cyclic", "none"])
def test_gradients_are_those_of_the_values(kind):
    """Central differences in exact arithmetic against the Jacobian."""
    rules = {"full": radon(20), "cyclic": rotated(), "none": two_point_gauss((1, 2))}
    rule = rules[kind]
    structure = structure_of(rule)
    system_type = PowerSumSystem if structure.full else MonomialSystem
    system = system_type(structure, rule.measure, 4, rule.space, None)
    bits, step = 160, 1 << 80
    x = [round((Fraction(1, 7) + Fraction(j, 50)) * 2**bits) for j in range(len(system.unknowns))]
    one = system.factor << bits
    columns = system.jacobian([v * system.factor for v in x], one, bits)
    for j, column in enumerate(columns):
        up, down = list(x), list(x)
        up[j] += step
        down[j] -= step
        above = system.residuals([v * system.factor for v in up], one)
        below = system.residuals([v * system.factor for v in down], one)
        for e, entry in enumerate(column):
            slope = (above[e] - below[e]) / (2 * Fraction(step, 2**bits))
            assert float(slope) == pytest.approx(entry / 2**bits, rel=1e-12, abs=1e-15)


@pytest.mark.parametrize("kind", ["full", "none"])
def test_the_curvature_bounds_differences_of_gradients(kind):
    rule = {"full": radon(20), "none": two_point_gauss((1, 2))}[kind]
    structure = structure_of(rule)
    system_type = PowerSumSystem if structure.full else MonomialSystem
    system = system_type(structure, rule.measure, 5, rule.space, None)
    bits, radius = 80, 1e-3
    rng = np.random.default_rng(0)
    at = []
    for o, b in system.unknowns:
        orbit = structure.orbits[o]
        at.append(Fraction(orbit.weight if b < 0 else orbit.values[b], read_printed(rule).one))
    x = [round(v * 2**bits) for v in at]
    one = system.factor << bits
    bound = system.curvature([v * system.factor for v in x], one, radius)
    start = np.array(system.jacobian([v * system.factor for v in x], one, bits), dtype=float) / 2**bits
    for _ in range(20):
        moved = [v + round(float(d) * 2**bits) for v, d in zip(x, rng.choice([-radius, radius], len(x)), strict=True)]
        there = np.array(system.jacobian([v * system.factor for v in moved], one, bits), dtype=float) / 2**bits
        assert (np.abs(there - start).sum(axis=0) <= bound * radius).all()
    assert (bound * radius < 1e3 * np.abs(there - start).sum(axis=0) + 1e-2).all()


def test_inverse_and_choice_of_columns():
    rng = np.random.default_rng(5)
    bits = 200
    numbers = rng.normal(size=(6, 6))
    matrix = np.array([[round(Fraction(float(v)) * 2**bits) for v in row] for row in numbers], dtype=object)
    inverse = invert(matrix, bits)
    defect = inverse @ matrix - (1 << 2 * bits) * np.eye(6, dtype=int).astype(object)
    assert max(abs(int(v)) for v in defect.ravel()) < 2 ** (bits + 40)
    with pytest.raises(NotProven, match="singular"):
        invert(np.vstack([matrix[:5], matrix[:1]]), bits)
    wide = matrix[:3].copy()
    wide[:, 1] = wide[:, 0]
    chosen = choose_unknowns(wide, [Fraction(1)] * 6, bits)
    assert len(chosen) == 3
    assert not {0, 1} <= set(chosen)


def test_snapping_outvotes_one_wrong_digit():
    rule = radon(20)
    printed = read_printed(rule)
    nodes = [list(node) for node in printed.nodes]
    nodes[4][1] += 10 ** (printed.places - 9)
    broken = replace(printed, nodes=tuple(map(tuple, nodes)))
    assert symmetrised(broken, 1e-7).nodes == printed.nodes
    assert symmetrised(broken, 1e-12).nodes == broken.nodes


def test_rounding_is_upwards():
    assert round_up(Fraction(0)) == "0"
    assert round_up(Fraction(1, 3)) == "3.4e-1"
    assert Fraction(Decimal(round_up(Fraction(1001, 10**60)))) >= Fraction(1001, 10**60)
    assert math.isclose(float(round_up(Fraction(2))), 2.0)
