"""Writing and reading tables: whatever form a rule takes, its digits come back."""

import json
from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st
from mpmath import mp, mpf

import simplexcub
from simplexcub.errors import InputError, TableError
from simplexcub.measures import dirichlet, flat, hilbert_schmidt, induced
from simplexcub.rounded import rule_from_orbits
from simplexcub.rule import Orbit, Provenance, Rule
from simplexcub.table import FORMATS, format_of, parse, read, render, save
from simplexcub.table.as_json import checksum
from simplexcub.verify import verify

BY_HAND = Provenance("simplexcub 0.1.0", 0, "2026-12-01", "written by hand")


def fraction(numerator, denominator=1, *, digits=50):
    with mp.workdps(digits + 20):
        return mpf(numerator) / denominator


def simpson():
    """Flat, N = 2, degree 3, in the 17 digits of a double."""
    sixth, two_thirds = "0.16666666666666667", "0.66666666666666667"
    nodes = (("1", "0"), ("0.5", "0.5"), ("0", "1"))
    return Rule(flat(2), 3, nodes, (sixth, two_thirds, sixth), BY_HAND, symmetry="full", digits=17)


def vertices_and_centre(digits=50):
    """Hilbert–Schmidt, N = 3, degree 2: vertices with total weight 2/5, the centre with 3/5."""
    number = lambda p, q=1: fraction(p, q, digits=digits)  # noqa: E731
    orbits = [((1, 2), (number(1), number(0)), number(2, 5)), ((3,), (number(1, 3),), number(3, 5))]
    return rule_from_orbits(hilbert_schmidt(3), 2, orbits, digits=digits, provenance=BY_HAND)


def centroid(measure):
    """Degree 1 for any measure: its mean, as a single node."""
    with mp.workdps(60):
        mean = [measure.moment([int(i == j) for j in range(measure.N)]) for i in range(measure.N)]
        texts = tuple(mp.nstr(mpf(m.numerator) / m.denominator, 30, strip_zeros=False) for m in mean)
    return Rule(measure, 1, (texts,), ("1",), BY_HAND, symmetry="none", digits=30)


def two_spectra():
    """Hilbert–Schmidt, N = 3, symmetric polynomials of degree 2: the vertex and the centre as representatives."""
    nodes = (("1", "0", "0"), ("0." + "3" * 20,) * 3)
    orbits = (Orbit((1, 2), ("1", "0"), "0.4"), Orbit((3,), ("0." + "3" * 20,), "0.6"))
    return Rule(
        hilbert_schmidt(3),
        2,
        nodes,
        ("0.4", "0.6"),
        BY_HAND,
        space="symmetric",
        symmetry="full",
        digits=20,
        orbits=orbits,
    )


def wide_orbits():
    """Hilbert–Schmidt, N = 8, symmetric polynomials of degree 1: the centre, with its pattern in the short form."""
    eighth = "0.12500000000000000000"
    return Rule(
        hilbert_schmidt(8),
        1,
        ((eighth,) * 8,),
        ("1.0000000000000000000",),
        BY_HAND,
        space="symmetric",
        symmetry="full",
        digits=20,
        orbits=(Orbit((8,), (eighth,), "1.0000000000000000000"),),
    )


def with_negative_weight():
    """Flat, N = 3, degree 3: centre with −9/16 and three nodes with 25/48 (Grundmann & Möller 1978)."""
    number = fraction
    orbits = [
        ((3,), (number(1, 3),), number(-9, 16)),
        ((1, 2), (number(3, 5), number(1, 5)), number(25, 16)),
    ]
    return rule_from_orbits(flat(3), 3, orbits, digits=50, provenance=BY_HAND)


def equal_weights():
    """Flat, N = 2, degree 3 with equal weights 1/2."""
    low, high = "0.211324865405187117745425609749", "0.788675134594812882254574390251"
    return Rule(
        flat(2), 3, ((low, high), (high, low)), ("0.5", "0.5"), BY_HAND, symmetry="full", equal_weights=True, digits=30
    )


RULES = {
    "simpson": simpson(),
    "vertices and centre": vertices_and_centre(),
    "16 digits": vertices_and_centre(16),
    "120 digits": vertices_and_centre(120),
    "unequal alpha": centroid(dirichlet(["1/2", "3/2", 2])),
    "induced": centroid(induced(3, 5)),
    "N = 6": centroid(hilbert_schmidt(6)),
    "symmetric": two_spectra(),
    "symmetric, N = 8": wide_orbits(),
    "negative weight": with_negative_weight(),
    "equal weights": equal_weights(),
}
READABLE = ("json", "csv", "text")


@pytest.fixture(params=RULES, ids=lambda name: name.replace(" ", "-"))
def rule(request):
    plain = RULES[request.param]
    return plain.verified(verify(plain).verification)


def test_the_sample_rules_hold():
    assert all(verify(rule).holds for rule in RULES.values())


@pytest.mark.parametrize("to", READABLE)
def test_a_rule_reads_back_equal(rule, to, tmp_path):
    path = tmp_path / f"rule{FORMATS[to].endings[0]}"
    save(rule, path)
    assert read(path) == rule
    assert read(path, measure=rule.measure) == rule


@pytest.mark.parametrize("to", ["json", "csv"])
def test_the_verification_block_reads_back(rule, to):
    proof = {"method": "interval Newton", "radius": "1e-50", "holds": True}
    proven = rule.verified(replace(rule.verification, proof=proof))
    assert parse(render(proven, to), "file").verification == proven.verification


@pytest.mark.parametrize("to", READABLE)
def test_byte_order_mark_and_foreign_line_ends_do_no_harm(rule, to, tmp_path):
    path = tmp_path / "rule"
    path.write_bytes(b"\xef\xbb\xbf" + render(rule, to).replace("\n", "\r\n").encode())
    assert read(path) == rule


@pytest.mark.parametrize("to", READABLE)
@pytest.mark.parametrize("order", ["reversed", "split"])
def test_nodes_in_another_order_than_their_orbits_keep_it(to, order):
    rule = vertices_and_centre()
    n = len(rule)
    places = list(reversed(range(n))) if order == "reversed" else [1, 3, 0, 2]
    shuffled = replace(
        rule,
        node_decimals=tuple(rule.node_decimals[k] for k in places),
        weight_decimals=tuple(rule.weight_decimals[k] for k in places),
    )
    back = parse(render(shuffled, to), "file")
    assert (back.node_decimals, back.weight_decimals) == (shuffled.node_decimals, shuffled.weight_decimals)


@given(
    st.lists(st.integers(1, 10**30), min_size=1, max_size=6),
    st.lists(st.integers(1, 10**30), min_size=6, max_size=6),
    st.sampled_from(READABLE),
)
def test_any_decimals_read_back(weights, coordinates, to):
    """Random rules of degree 1 that no solver would make."""

    def shares(numbers, digits=34):
        total = sum(numbers)
        units = [n * 10**digits // total for n in numbers]
        units[0] += 10**digits - sum(units)
        return tuple(f"{u // 10**digits}.{u % 10**digits:0{digits}d}" for u in units)

    nodes = tuple(shares([*coordinates[k:], *coordinates[:k]][:3]) for k in range(len(weights)))
    rule = Rule(flat(3), 1, nodes, shares(weights), BY_HAND, symmetry="none", digits=34)
    assert parse(render(rule, to), "file") == rule


def test_json_has_the_documented_keys():
    record = json.loads(render(vertices_and_centre(), "json"))
    assert set(record) == {
        *("format", "version", "measure", "space", "degree", "symmetry", "equal_weights", "digits"),
        *("nodes", "weights", "orbits", "verification", "provenance", "sha256"),
    }
    assert record["format"] == "simplexcub-rule"
    assert record["version"] == 1
    assert record["measure"] == {"family": "hilbert-schmidt", "N": 3, "K": 3}
    assert record["orbits"][0] == {
        "multiplicities": [1, 2],
        "values": [record["nodes"][0][0], "0.0"],
        "weight": "0.4" + "0" * 49,
    }
    assert set(record["provenance"]) == {"package", "seed", "date", "method"}
    assert record["verification"]["fails_at_degree"] == 3


def test_the_checksum_is_that_of_the_canonical_text():
    record = json.loads(render(simpson(), "json"))
    assert record["sha256"] == checksum(record)
    assert checksum({"b": "λ", "a": [1, True], "sha256": "any"}) == (
        # printf '{"a":[1,true],"b":"λ"}' | sha256sum
        "438ce49a0facd2b016fdf0936e181c6c27c3f8519bb146fd95f7d19a0d80c4ff"
    )


def test_a_rule_that_was_never_checked_is_verified_when_written(tmp_path):
    save(simpson(), tmp_path / "s.json")
    assert read(tmp_path / "s.json").verification == verify(simpson()).verification


def test_an_existing_verification_is_not_made_again(monkeypatch):
    verified = simpson().verified(verify(simpson()).verification)
    monkeypatch.setattr("simplexcub.table.formats.verify", None)
    assert parse(render(verified, "json"), "file") == verified


@pytest.mark.parametrize("to", [name for name, form in FORMATS.items() if not form.binary])
@pytest.mark.parametrize(
    ("wrong", "reason"),
    [
        (replace(simpson(), degree=5), "degree 4 already fails"),
        (replace(simpson(), weight_decimals=("0.2", "0.6", "0.2")), "degree 2 already fails"),
        (replace(simpson(), equal_weights=True), "equal weights are claimed"),
        (replace(simpson(), digits=40), "40 digits claimed"),
    ],
    ids=["degree", "weights", "equal", "digits"],
)
def test_a_rule_that_does_not_hold_says_so(wrong, reason, to):
    text = " ".join(render(wrong, to).split())
    if to == "json":
        assert json.loads(text)["verification"] == json.loads(
            json.dumps(vars(verify(wrong).verification), default=vars)
        )
    else:
        assert "NOT VERIFIED: " in text
        assert reason in text


@pytest.mark.parametrize("to", [name for name, form in FORMATS.items() if not form.binary])
def test_a_rule_that_holds_does_not_say_otherwise(rule, to):
    assert "NOT VERIFIED" not in render(rule, to)


def test_the_format_follows_the_ending_or_the_name(tmp_path):
    assert {format_of(f"x{ending}") for form in FORMATS.values() for ending in form.endings} == set(FORMATS)
    assert format_of("X.JSON") == "json"
    save(simpson(), tmp_path / "table", to="csv")
    assert (tmp_path / "table").read_text(encoding="utf-8").startswith("# format: simplexcub-rule 1\n")


@pytest.mark.parametrize(
    "call",
    [
        lambda folder: save(simpson(), folder / "s.docx"),
        lambda folder: save(simpson(), folder / "s"),
        lambda folder: save(simpson(), folder / "s.json", to="docx"),
        lambda folder: render(simpson(), "docx"),
        lambda folder: render(simpson(), "npz"),
    ],
    ids=["ending", "no ending", "name", "render", "binary"],
)
def test_an_unknown_format_is_refused_before_anything_is_written(call, tmp_path):
    with pytest.raises(InputError, match=r"format|ending"):
        call(tmp_path)
    assert not list(tmp_path.iterdir())


def test_the_names_at_the_top_of_the_package():
    assert (simplexcub.read, simplexcub.save) == (read, save)


# Tables of other makers


@pytest.mark.parametrize(
    "text",
    [
        "1 0 0.16666667\n0.5 0.5 0.66666667\n0 1 0.16666667\n",
        "x,y,weight\n1,0,0.16666667\n0.5,0.5,0.66666667\n0,1,0.16666667",
        '"x";"y";"w"\n1;0;0.16666667\n\n.5;.5;0.66666667\n0;1;0.16666667\n',
        "# Simpson\n% and more\n1\t0\t1.6666667e-1\n5E-1\t0.5\t0.66666667\n0\t1\t+0.16666667\n",
        "1.,0.,0.16666667,\n0.5,0.5,0.66666667,\n0.,1.,0.16666667,\n",
        '{"nodes": [[1, 0], [0.5, "0.5"], [0, 1]], "weights": [0.16666667, 0.66666667, "0.16666667"], "by": "hand"}',
    ],
    ids=["blanks", "commas", "semicolons", "tabs", "trailing commas", "json"],
)
def test_foreign_tables_are_read_for_a_given_measure(text):
    rule = parse(text, "folder/simpson.dat", flat(2))
    assert [tuple(map(Fraction, node)) for node in rule.node_decimals] == [(1, 0), (Fraction(1, 2),) * 2, (0, 1)]
    assert [Fraction(w) for w in rule.weight_decimals] == [
        Fraction(w) for w in ("0.16666667", "0.66666667", "0.16666667")
    ]
    assert (rule.degree, rule.symmetry, rule.digits, rule.verification) == (0, "none", 8, None)
    assert rule.provenance.method == "read from simpson.dat"
    assert verify(rule).exact_degree == 3


def test_foreign_digits_are_kept_as_written():
    digits = "0.12345678901234567890123456789012345678901234567890"
    other = "0.87654321098765432109876543210987654321098765432110"
    for text in (f"{digits} {other} 1", f'{{"nodes": [[{digits}, {other}]], "weights": [1]}}'):
        rule = parse(text, "t", flat(2))
        assert rule.node_decimals == ((digits, other),)
        assert rule.digits == 50


def test_a_rule_that_claims_nothing_is_printed_with_what_was_found():
    rule = parse("1 0 0.16666667\n0.5 0.5 0.66666667\n0 1 0.16666667\n", "t", flat(2))
    assert "no degree is claimed; as printed the rule is exact to degree 3" in render(rule, "csv")


def test_rows_without_a_measure_are_refused():
    with pytest.raises(TableError, match=r"must name its measure.*Say which measure"):
        parse("0.5 0.5 1\n", "t")


def test_another_measure_than_the_tables_own_is_refused():
    with pytest.raises(InputError, match=r"measure must be the table's own, flat\(N=2\); got hilbert-schmidt"):
        parse(render(simpson(), "json"), "t", hilbert_schmidt(2))
