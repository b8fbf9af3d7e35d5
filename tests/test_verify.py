"""Published rules must be found exact to their published degree, and no further."""

import itertools
import math
from fractions import Fraction

import pytest
from mpmath import mp, mpf

import simplexcub
from simplexcub.decimals import to_decimal
from simplexcub.errors import InputError
from simplexcub.measures import bures, dirichlet, flat, hilbert_schmidt, induced
from simplexcub.rounded import rule_from_orbits
from simplexcub.rule import Provenance, Rule
from simplexcub.verify import lower_bound, verify
from simplexcub.verify.bounds import dimension

BY_HAND = Provenance("none", 0, "2026-01-01", "typed in")


def rule(measure, degree, nodes, weights, *, digits=50, **claims):
    """Numbers are printed to `digits` digits; strings are taken as they stand."""

    def text(x):
        return x if isinstance(x, str) else to_decimal(x, digits)

    printed = tuple(tuple(text(x) for x in node) for node in nodes)
    claims = {"symmetry": "none", "digits": digits, **claims}
    return Rule(measure, degree, printed, tuple(text(w) for w in weights), BY_HAND, **claims)


def simpson(**claims):
    nodes = [(1, 0), (Fraction(1, 2), Fraction(1, 2)), (0, 1)]
    nodes = [tuple(Fraction(x) for x in node) for node in nodes]
    return rule(flat(2), 3, nodes, [Fraction(1, 6), Fraction(4, 6), Fraction(1, 6)], **{"symmetry": "full", **claims})


def radon(digits=50):
    """J. Radon, Monatshefte für Mathematik 52 (1948) 286: seven nodes, degree 5."""
    with mp.workdps(digits + 20):
        orbits = [((3,), [mpf(1) / 3], mpf(9) / 40)]
        for root in (mp.sqrt(15), -mp.sqrt(15)):
            b = (6 + root) / 21
            orbits.append(((1, 2), [1 - 2 * b, b], 3 * (155 + root) / 1200))
        return rule_from_orbits(flat(3), 5, orbits, digits=digits, provenance=BY_HAND)


def gauss_legendre(n):
    """Closed forms for 2, 3 and 5 nodes, moved from [−1, 1] to the simplex of two components."""
    with mp.workdps(80):
        if n == 2:
            pairs = [(mp.sqrt(mpf(1) / 3), mpf(1))]
            centre = None
        elif n == 3:
            pairs, centre = [(mp.sqrt(mpf(3) / 5), mpf(5) / 9)], mpf(8) / 9
        else:
            root = 2 * mp.sqrt(mpf(10) / 7)
            pairs = [
                (mp.sqrt(5 - root) / 3, (322 + 13 * mp.sqrt(70)) / 900),
                (mp.sqrt(5 + root) / 3, (322 - 13 * mp.sqrt(70)) / 900),
            ]
            centre = mpf(128) / 225
        nodes, weights = [], []
        for x, w in pairs:
            for sign in (1, -1):
                nodes.append(((1 + sign * x) / 2, (1 - sign * x) / 2))
                weights.append(w / 2)
        if centre is not None:
            nodes.append((mpf(1) / 2, mpf(1) / 2))
            weights.append(centre / 2)
        return rule(flat(2), 2 * n - 1, nodes, weights, symmetry="full")


def grundmann_moeller(n, s, digits=50):
    """A. Grundmann, H. M. Möller, SIAM J. Numer. Anal. 15 (1978) 282: degree 2s + 1 in n components."""
    dim, d = n - 1, 2 * s + 1
    nodes, weights = [], []
    for i in range(s + 1):
        size = d + dim - 2 * i
        weight = Fraction((-1) ** i * size**d, 4**s * math.factorial(i) * math.factorial(d + dim - i))
        for beta in itertools.product(range(s - i + 1), repeat=n):
            if sum(beta) == s - i:
                nodes.append(tuple(Fraction(2 * b + 1, size) for b in beta))
                weights.append(weight * math.factorial(dim))
    return rule(flat(n), d, nodes, weights, digits=digits, symmetry="full")


def vertices_and_centre(measure, vertex_weight, degree=2, **claims):
    n = measure.N
    nodes = [tuple(Fraction(i == j) for j in range(n)) for i in range(n)] + [(Fraction(1, n),) * n]
    weights = [vertex_weight / n] * n + [1 - vertex_weight]
    return rule(measure, degree, nodes, weights, **{"symmetry": "full", **claims})


def representatives(full):
    """The rule for symmetric functions that a fully symmetric rule contains: one node per orbit, its total weight."""
    orbits = {}
    with mp.workdps(80):
        for node, weight in zip(full.node_decimals, full.weight_decimals, strict=True):
            key = tuple(sorted(node, key=mpf, reverse=True))
            orbits[key] = orbits.get(key, mpf(0)) + mpf(weight)
        weights = [to_decimal(w, full.digits) for w in orbits.values()]
    claims = {"space": "symmetric", "symmetry": "full", "digits": full.digits}
    return rule(full.measure, full.degree, list(orbits), weights, **claims)


PUBLISHED = {
    "Simpson": (simpson(), 3),
    "Radon 1948": (radon(), 5),
    "Gauss-Legendre 2": (gauss_legendre(2), 3),
    "Gauss-Legendre 3": (gauss_legendre(3), 5),
    "Gauss-Legendre 5": (gauss_legendre(5), 9),
    "Hilbert-Schmidt 3": (vertices_and_centre(hilbert_schmidt(3), Fraction(2, 5)), 2),
    "flat 5": (vertices_and_centre(flat(5), Fraction(1, 6)), 2),
    "Grundmann-Moeller 3, 1": (grundmann_moeller(3, 1), 3),
    "Grundmann-Moeller 3, 3": (grundmann_moeller(3, 3), 7),
    "Grundmann-Moeller 4, 2": (grundmann_moeller(4, 2), 5),
    "Grundmann-Moeller 5, 2": (grundmann_moeller(5, 2), 5),
}


@pytest.mark.parametrize("name", PUBLISHED)
def test_published_rules_hold_to_their_degree_and_no_further(name):
    candidate, degree = PUBLISHED[name]
    report = verify(candidate)
    assert report.reasons == ()
    assert report.holds
    assert report.exact_degree == degree
    assert report.digits == 50
    block = report.verification
    assert block.fails_at_degree == degree + 1
    assert block.moments_checked == math.comb(degree + candidate.measure.N - 1, candidate.measure.N - 1)
    assert sum(block.worst_exponents) == degree
    assert float(block.max_residual) < 1e-48
    assert block.inside
    assert block.lower_bound == lower_bound(candidate.measure, degree) <= len(candidate)
    assert block.proof is None


@pytest.mark.parametrize("name", PUBLISHED)
def test_a_rule_that_claims_nothing_is_given_the_same_degree(name):
    candidate, degree = PUBLISHED[name]
    foreign = rule(candidate.measure, 0, candidate.node_decimals, candidate.weight_decimals)
    report = verify(foreign)
    assert report.holds
    assert report.exact_degree == degree
    assert report.digits == 50


@pytest.mark.parametrize("name", PUBLISHED)
def test_representatives_are_exact_on_symmetric_functions_to_the_same_degree(name):
    # A fully symmetric rule is exact on all polynomials of a degree if and only if it is on the symmetric ones.
    candidate, degree = PUBLISHED[name]
    report = verify(representatives(candidate))
    assert report.reasons == ()
    assert report.exact_degree == degree
    assert report.verification.moments_checked == dimension(candidate.measure.N, degree, "symmetric")


def test_symmetric_space_does_not_ask_for_other_functions():
    one = rule(flat(3), 1, [(Fraction(1, 3),) * 3], [Fraction(1)])
    assert verify(one).exact_degree == 1
    # (2/3, 1/3, 0) alone has mean of λ1 wrong, but Σ λ_i = 1 is symmetric.
    lone = [(Fraction(2, 3), Fraction(1, 3), Fraction(0))]
    assert verify(rule(flat(3), 1, lone, [Fraction(1)], space="symmetric")).holds
    assert not verify(rule(flat(3), 1, lone, [Fraction(1)])).holds


def test_symmetric_space_of_an_unsymmetric_measure():
    # E[Σ λ²] of Dirichlet(1, 2) is 2/12 + 6/12; the node (x, 1 − x) with x² + (1 − x)² = 2/3 has it.
    mu = dirichlet([1, 2])
    with mp.workdps(70):
        x = (1 + 1 / mp.sqrt(3)) / 2
        report = verify(rule(mu, 3, [(x, 1 - x)], [Fraction(1)], space="symmetric"))
    assert report.exact_degree == 3
    assert report.holds


def test_grundmann_moeller_weights_are_reported_but_no_fault():
    report = verify(grundmann_moeller(4, 2))
    assert report.holds
    assert not report.verification.positive
    assert verify(radon()).verification.positive


def test_symmetry_of_the_set_changes_the_work_and_not_the_answer():
    full = verify(radon())
    # With one coordinate spoilt in its last digit the set is not invariant and all 21 monomials are summed.
    plain = radon()
    nodes = list(plain.node_decimals)
    last = nodes[1][0]
    nodes[1] = (last[:-1] + str((int(last[-1]) + 1) % 10), *nodes[1][1:])
    report = verify(rule(flat(3), 5, nodes, plain.weight_decimals))
    assert report.holds
    assert report.exact_degree == full.exact_degree == 5
    assert report.verification.moments_checked == full.verification.moments_checked == 21


ABRAMOWITZ_STEGUN_25_4 = {
    2: [("0.577350269189626", "1.000000000000000")],
    3: [("0", "0.888888888888889"), ("0.774596669241483", "0.555555555555556")],
    5: [
        ("0", "0.568888888888889"),
        ("0.538469310105683", "0.478628670499366"),
        ("0.906179845938664", "0.236926885056189"),
    ],
}


@pytest.mark.parametrize("n", ABRAMOWITZ_STEGUN_25_4)
def test_a_handbook_table_of_fifteen_places_is_judged_to_its_own_digits(n):
    nodes, weights = [], []
    for abscissa, weight in ABRAMOWITZ_STEGUN_25_4[n]:
        for sign in (1, -1) if Fraction(abscissa) else (1,):
            x = (1 + sign * Fraction(abscissa)) / 2
            nodes.append((f"{float(x):.15f}", f"{float(1 - x):.15f}"))
            weights.append(f"{float(Fraction(weight) / 2):.15f}")
    report = verify(rule(flat(2), 0, nodes, weights, digits=15))
    assert report.reasons == ()
    assert report.exact_degree == 2 * n - 1
    assert report.digits == 15
    assert verify(rule(flat(2), 2 * n - 1, nodes, weights, digits=15)).holds


@pytest.mark.parametrize("digits", [5, 15, 30, 100, 320])
def test_the_tolerance_follows_the_printed_digits(digits):
    report = verify(radon(digits))
    assert report.holds
    assert report.exact_degree == 5
    assert report.digits == digits


def test_cut_off_decimals_are_accepted_like_rounded_ones():
    long = radon(50)
    nodes = [[x[:22] for x in node] for node in long.node_decimals]
    report = verify(rule(flat(3), 5, nodes, [w[:22] for w in long.weight_decimals], digits=20))
    assert report.reasons == ()
    assert report.digits == 20


def test_short_terminating_decimals_are_read_as_exact():
    report = verify(rule(flat(2), 1, [("0.5", "0.5")], ["1"], digits=1))
    assert report.exact_degree == 1
    assert report.verification.max_residual == "0"
    # Flat, N = 4: vertices with 1/5 in all and the centre with 4/5 are exact at degree 2.
    vertices = [tuple("01"[i == j] for j in range(4)) for i in range(4)]
    terminating = rule(flat(4), 2, [*vertices, ("0.25",) * 4], ["0.05"] * 4 + ["0.8"], digits=2)
    assert verify(terminating).reasons == ()
    assert verify(terminating).exact_degree == 2
    assert verify(terminating).verification.max_residual == "0"
    trapezium = rule(flat(2), 0, [("1", "0"), ("0", "1")], ["0.5", "0.5"], digits=1)
    assert verify(trapezium).exact_degree == 1
    assert not verify(rule(flat(2), 3, [("0.5", "0.5")], ["1"], digits=1)).holds


def test_exponent_notation_is_read():
    report = verify(rule(flat(2), 1, [("5.000000e-1", "50.00000E-2")], ["1.000000"], digits=7))
    assert report.holds


def test_another_measure_can_be_asked_for():
    candidate = vertices_and_centre(hilbert_schmidt(3), Fraction(2, 5))
    report = verify(candidate, measure=induced(3, 5))
    assert not report.holds
    assert report.measure == induced(3, 5)
    assert report.exact_degree == 1
    assert verify(candidate, measure=hilbert_schmidt(3)).holds


def test_means_come_from_the_last_route(monkeypatch):
    used = []
    plain = type(flat(3))._moment

    def spy(self, exponents, route):
        used.append(route)
        return plain(self, exponents, route)

    monkeypatch.setattr(type(flat(3)), "_moment", spy)
    alpha = [Fraction(7, 3)] * 3  # used by no other test, so nothing is remembered of it
    verify(rule(dirichlet(alpha), 1, [(Fraction(1, 3),) * 3], [Fraction(1)]))
    assert set(used) == {"stick-breaking"}


def test_max_degree_ends_the_search():
    foreign = rule(flat(2), 0, gauss_legendre(5).node_decimals, gauss_legendre(5).weight_decimals)
    assert verify(foreign, max_degree=4).exact_degree == 4
    assert verify(foreign, max_degree=30).exact_degree == 9
    assert verify(gauss_legendre(5), max_degree=9).exact_degree == 9


def test_progress_hears_of_every_degree():
    heard = []
    # Degree 3 is claimed and fails, so the highest exact degree is looked for from 0 up.
    verify(vertices_and_centre(flat(4), Fraction(1, 5), degree=3), progress=heard.append)
    assert [step.degree for step in heard] == [3, 0, 1, 2]
    assert all(step.text.startswith(f"degree {step.degree}: ") for step in heard)


def test_the_function_answers_under_its_public_name():
    assert simplexcub.verify(radon()).holds


def test_bad_arguments():
    with pytest.raises(InputError, match="measure must have the rule's N = 3 components"):
        verify(radon(), measure=flat(4))
    with pytest.raises(InputError, match="max_degree must be at least the claimed degree 5; got 4"):
        verify(radon(), max_degree=4)
    with pytest.raises(InputError, match=r"ordered moments .* got bures\(N=3\)"):
        verify(rule(bures(3), 1, [(Fraction(1, 3),) * 3], [Fraction(1)], space="ordered"))
