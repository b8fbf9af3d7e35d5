"""What must not pass: spoilt digits and false claims, each refused with a sentence that says what is wrong."""

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given, seed, settings
from hypothesis import strategies as st
from test_verify import gauss_legendre, grundmann_moeller, radon, representatives, rule, simpson, vertices_and_centre

from simplexcub.errors import InputError
from simplexcub.measures import dirichlet, flat, hilbert_schmidt
from simplexcub.rule import Orbit
from simplexcub.verify import verify
from simplexcub.verify.printed import parse_decimal


def changed(text, position, digit):
    """`text` with the digit that stands at index `position` among its digits replaced."""
    places = [i for i, c in enumerate(text) if c.isdigit()]
    i = places[position]
    return text[:i] + str(digit) + text[i + 1 :]


def with_weight(old, k, text):
    weights = list(old.weight_decimals)
    weights[k] = text
    return replace(old, weight_decimals=tuple(weights))


def with_node(old, k, node):
    nodes = list(old.node_decimals)
    nodes[k] = tuple(node)
    return replace(old, node_decimals=tuple(nodes))


def refused(candidate, *sentences, **options):
    report = verify(candidate, **options)
    assert not report.holds
    for sentence in sentences:
        assert any(sentence in reason for reason in report.reasons), report.reasons
    return report


def test_weight_nudged_in_a_late_digit():
    old = gauss_legendre(5)
    text = old.weight_decimals[0]
    report = refused(with_weight(old, 0, changed(text, 45, (int(text[46]) + 5) % 10)), "the weights sum to 1 ")
    assert report.exact_degree == -1
    assert 43 <= report.digits <= 47


def test_two_weights_nudged_so_that_their_sum_stays():
    old = replace(gauss_legendre(5), symmetry="none")
    first, second = (Fraction(w) for w in old.weight_decimals[:2])
    nudge = Fraction(1, 10**40)
    moved = with_weight(old, 0, f"0.{int((first + nudge) * 10**50):050d}")
    moved = with_weight(moved, 1, f"0.{int((second - nudge) * 10**50):050d}")
    report = refused(moved, "degree 9 claimed, but the mean of λ", "e-41 (degree 1)")
    assert len(report.reasons) == 1
    assert report.exact_degree == 0
    assert 38 <= report.digits <= 41


def test_swapped_digits():
    old = radon()
    x = old.node_decimals[1][0]
    i = next(i for i in range(12, 40) if x[i] != x[i + 1])
    swapped = x[:i] + x[i + 1] + x[i] + x[i + 2 :]
    node = (swapped, *old.node_decimals[1][1:])
    refused(
        with_node(old, 1, node),
        "a node is off the simplex: the coordinates of node 2 sum to 1 ",
        "symmetry full is claimed, but the printed nodes and weights are not invariant under it",
        "the orbits do not expand to the listed nodes",
        "degree 5 claimed, but the mean of ",
    )


def test_swapped_weights():
    old = gauss_legendre(3)
    weights = (old.weight_decimals[2], old.weight_decimals[1], old.weight_decimals[0])
    refused(replace(old, weight_decimals=weights), "symmetry full is claimed", "degree 5 claimed")


def test_wrong_measure():
    report = refused(radon(), "degree 5 claimed, but the mean of λ1^2 is off by", measure=hilbert_schmidt(3))
    assert report.exact_degree == 1
    assert report.digits < 3


def test_wrong_degree():
    report = refused(replace(radon(), degree=6), "degree 6 claimed, but the mean of ", "(degree 6)")
    assert report.exact_degree == 5
    assert report.verification.fails_at_degree == 6
    assert report.verification.moments_checked == 28
    report = refused(replace(radon(), degree=8), "(degree 6)", "degree 8 claimed with 7 nodes, but no such rule has")
    assert report.exact_degree == 5


def test_coarse_digits_cannot_hide_an_impossible_claim():
    # One digit leaves so much room that degree 9 cannot be told apart; the number of nodes can.
    refused(
        rule(flat(2), 9, [("0.2", "0.8"), ("0.8", "0.3")], ["0.5", "0.5"], digits=1),
        "degree 9 claimed with 2 nodes, but no such rule has fewer than 5",
    )


def test_node_off_the_simplex():
    old = simpson(symmetry="none")
    one, zero = old.node_decimals[0]
    off = with_node(old, 0, (one, "0.0000000001"))
    report = refused(off, "a node is off the simplex: the coordinates of node 1 sum to 1 + 1.0e-10, not to 1")
    assert not report.verification.inside
    negative = with_node(old, 0, ("1.01", "-0.01"))
    report = refused(negative, "a node is off the simplex: λ2 of node 1 is -1.0e-2")
    assert not report.verification.inside
    both = with_node(negative, 2, ("-0.5", "1.5"))
    refused(both, "2 of 3 nodes are off the simplex, the first because λ2 of node 1 is -1.0e-2")
    far = with_node(old, 0, (one, "1" + "0" * 25))
    assert not refused(far, "sum to 1 + 1.0e+25, not to 1").verification.inside
    assert zero == "0.0"
    short = with_node(old, 1, ("0.5", "0.4999999999"))
    refused(short, "a node is off the simplex: the coordinates of node 2 sum to 1 - 1.0e-10, not to 1")


def test_a_node_far_off_does_not_overflow():
    far = with_node(replace(gauss_legendre(5), degree=30), 0, ("1" * 29, "0"))
    refused(far, "a node is off the simplex: the coordinates of node 1 sum to 1 + 1.1e+28, not to 1")


def test_moments_of_the_degree_do_not_imply_the_lower_ones_off_the_simplex():
    report = refused(rule(flat(2), 1, [("0.25000", "0.25000")], ["2.0000"], digits=5), "the weights sum to 1 + 1.0e+0")
    assert report.exact_degree == -1


def test_sorted_exponents_do_not_stand_for_all_without_symmetry():
    # In both cases the mean of λ1 is 1/3, as it should be, and those of λ2 and λ3 are not.
    third, sixth, half = Fraction(1, 3), Fraction(1, 6), Fraction(1, 2)
    centre = rule(dirichlet([1, "1/2", "3/2"]), 1, [(third,) * 3], [Fraction(1)], symmetry="full")
    report = refused(centre, "degree 1 claimed, but the mean of λ", "is off by 1.7e-1 (degree 1)")
    assert report.verification.worst_exponents in {(0, 1, 0), (0, 0, 1)}
    refused(rule(flat(3), 1, [(third, sixth, half)], [Fraction(1)]), "degree 1 claimed, but the mean of λ")


def test_a_table_that_claims_nothing_is_given_two_digits_and_no_more():
    old = replace(gauss_legendre(5), degree=0, symmetry="none")
    first, second = (int(Fraction(w) * 10**50) for w in old.weight_decimals[:2])
    for nudge, degree in ((30, 9), (30000, 0)):
        moved = with_weight(with_weight(old, 0, f"0.{first + nudge:050d}"), 1, f"0.{second - nudge:050d}")
        assert verify(moved).exact_degree == degree


def test_false_symmetry():
    old = replace(
        gauss_legendre(2), node_decimals=gauss_legendre(2).node_decimals[:1], weight_decimals=("1",), degree=0
    )
    refused(old, "symmetry full is claimed")
    assert verify(replace(old, symmetry="none")).holds
    refused(
        replace(radon(), symmetry="icosahedral"), "symmetry icosahedral is claimed; only full and none can be checked"
    )
    # Invariant under the transposition of the first two coordinates, not under all.
    half = rule(flat(3), 0, [("0.25", "0.25", "0.5")], ["1"], digits=2, symmetry="full")
    refused(half, "symmetry full is claimed")
    # Invariant under cyclic permutations only.
    cycle = [("0.125", "0.25", "0.625"), ("0.25", "0.625", "0.125"), ("0.625", "0.125", "0.25")]
    third = ["0.3333333333"] * 3
    refused(rule(flat(3), 0, cycle, third, digits=10, symmetry="full"), "symmetry full is claimed")


def test_false_equal_weights():
    refused(
        replace(simpson(), equal_weights=True), "equal weights are claimed, but the printed ones differ by up to 5.0e-1"
    )
    assert verify(replace(gauss_legendre(2), equal_weights=True)).holds


def test_false_digits():
    report = refused(replace(radon(20), digits=50), "50 digits claimed, but the decimals carry at most 20")
    assert report.exact_degree == 5
    assert len(report.reasons) == 1


def test_digits_padded_with_zeros_do_not_count():
    short = radon(20)
    nodes = tuple(tuple(x + "0" * 30 for x in node) for node in short.node_decimals)
    weights = tuple(w + "0" * 30 for w in short.weight_decimals)
    report = refused(
        replace(short, node_decimals=nodes, weight_decimals=weights, orbits=(), digits=50), "degree 5 claimed"
    )
    assert 18 <= report.digits <= 21


@pytest.mark.parametrize(
    ("orbits", "sentence"),
    [
        ((Orbit((2, 1), ("0.1", "0.9"), "1"),), "the orbits expand to 3 nodes, but 7 are listed"),
        ((Orbit((2, 2), ("0.1", "0.9"), "1"),), "orbit 1 must have one multiplicity per value, with sum 3"),
        ((Orbit((), (), "1"),), "orbit 1 must have one multiplicity per value"),
        ((*radon().orbits[:2], Orbit((1, 2), ("0.8", "0.1"), "0.4")), "the orbits do not expand to the listed nodes"),
        ((*radon().orbits[:2], Orbit((1, 2), ("0.8", "x"), "0.4")), "value of orbit 3 must be a decimal number"),
        (
            (*radon().orbits[:2], replace(radon().orbits[2], weight="0.4")),
            "the weight of orbit 3 is not that of its listed nodes",
        ),
    ],
)
def test_false_orbits(orbits, sentence):
    report = refused(replace(radon(), orbits=orbits), sentence)
    assert len(report.reasons) == 1


def test_orbit_weight_with_a_wrong_late_digit():
    good = radon()
    weight = good.orbits[2].weight
    spoilt = replace(good.orbits[2], weight=changed(weight, 47, (int(weight[48]) + 5) % 10))
    refused(replace(good, orbits=(*good.orbits[:2], spoilt)), "the weight of orbit 3 is not that of its listed nodes")


def test_representatives_out_of_order():
    good = representatives(radon())
    node = good.node_decimals[1]
    refused(
        with_node(good, 1, node[::-1]), "node 2 stands for its orbit, but its coordinates are not in descending order"
    )


def test_representatives_with_a_spoilt_weight():
    good = representatives(grundmann_moeller(4, 2))
    text = good.weight_decimals[1]
    refused(
        with_weight(good, 1, changed(text, 20, (int(text[21]) + 5) % 10)), "degree 5 claimed, but the mean of the symm"
    )


def test_too_many_degrees_for_symmetric_functions():
    good = representatives(vertices_and_centre(hilbert_schmidt(3), Fraction(2, 5)))
    assert refused(replace(good, degree=4), "the mean of the symmetrised λ1", "(degree 3)").exact_degree == 2


@pytest.mark.parametrize(
    "text",
    [
        "",
        "x",
        "nan",
        "inf",
        "1/3",
        "0x1",
        "1e",
        ".",
        "--1",
        "1_0",
        "١",
        pytest.param("9" * 5000, id="5000 nines"),
        "1e40",
        "1e-5000",
        "1e9999999",
    ],
)
def test_entries_that_are_not_decimals(text):
    with pytest.raises(InputError, match="weight 2 must"):
        verify(with_weight(simpson(), 1, text))
    with pytest.raises(InputError, match="λ2 of node 1 must"):
        verify(with_node(simpson(), 0, ("1", text)))


MUTABLE = {
    "Radon": radon(),
    "Gauss-Legendre": gauss_legendre(5),
    "Simpson": simpson(),
    "15 nodes": grundmann_moeller(3, 2),
}


@seed(20260101)
@settings(max_examples=300, deadline=None, derandomize=True)
@given(name=st.sampled_from(sorted(MUTABLE)), data=st.data())
def test_any_digit_changed_above_the_last_two_is_refused(name, data):
    old = MUTABLE[name]
    k = data.draw(st.integers(0, len(old) - 1))
    i = data.draw(st.integers(0, old.measure.N))
    text = (*old.node_decimals[k], old.weight_decimals[k])[i]
    count = sum(c.isdigit() for c in text)
    position = data.draw(st.integers(0, max(0, count - 3)))
    was = int([c for c in text if c.isdigit()][position])
    spoilt = changed(text, position, data.draw(st.integers(0, 9).filter(lambda digit: digit != was)))
    if i < old.measure.N:
        node = list(old.node_decimals[k])
        node[i] = spoilt
        report = verify(with_node(old, k, node))
    else:
        report = verify(with_weight(old, k, spoilt))
    assert not report.holds
    assert report.reasons


@seed(20260102)
@settings(max_examples=80, deadline=None, derandomize=True)
@given(
    numbers=st.lists(
        st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**25), max_value=10**25),
        min_size=9,
        max_size=9,
    ),
    degree=st.integers(0, 6),
)
def test_arbitrary_numbers_are_judged_and_never_accepted(numbers, degree):
    texts = [f"{x:f}" for x in numbers]
    # Two nodes cannot be exact at degree 2, whatever the digits.
    candidate = rule(flat(3), degree, [texts[:3], texts[3:6]], texts[6:8], digits=1)
    report = verify(candidate)
    assert report.exact_degree < 2
    assert report.holds == (not report.reasons)
    assert not (report.holds and degree >= 2)


@seed(20260103)
@settings(derandomize=True)
@given(mantissa=st.integers(-(10**25), 10**25), places=st.integers(1, 60))
def test_parsing_is_exact(mantissa, places):
    digits = f"{abs(mantissa):0{places + 1}d}"
    point = f"{'-' if mantissa < 0 else '+'}{digits[:-places]}.{digits[-places:]}"
    for text in (point, f"{mantissa}e-{places}", f" {mantissa}E-{places:03d} "):
        m, p = parse_decimal(text, "x")
        assert Fraction(m, 10**p) == Fraction(mantissa, 10**places)
