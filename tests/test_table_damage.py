"""Damaged, forged and foreign files: one line that names the file, the rule and the value, and never a traceback."""

import json
import pickle

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from test_table import READABLE, simpson, two_spectra, vertices_and_centre

from simplexcub.errors import InputError, TableError
from simplexcub.measures import flat
from simplexcub.table import parse, render
from simplexcub.table.as_json import checksum

TEXTS = {to: render(vertices_and_centre(), to) for to in READABLE}
FLAT_TEXTS = {to: render(simpson(), to) for to in READABLE}


def refused(text, message, measure=None):
    with pytest.raises(TableError, match=message) as caught:
        parse(text, "folder/file", measure)
    line = str(caught.value)
    assert line.startswith("folder/file")
    assert "\n" not in line
    assert len(line) < 600
    assert str(pickle.loads(pickle.dumps(caught.value))) == line


def forged(change):
    """The JSON table with a change made and the checksum made to fit."""
    record = json.loads(TEXTS["json"])
    change(record)
    record["sha256"] = checksum(record)
    return json.dumps(record)


def put(*path_and_value):
    *path, key, value = path_and_value

    def change(record):
        for step in path:
            record = record[step]
        record[key] = value

    return change


def without(*path):
    def change(record):
        for step in path[:-1]:
            record = record[step]
        del record[path[-1]]

    return change


@pytest.mark.parametrize("digit", ["nodes", "weights", "degree"])
def test_a_change_by_hand_breaks_the_checksum(digit):
    record = json.loads(TEXTS["json"])
    put(*{"nodes": ("nodes", 0, 0, "0.99"), "weights": ("weights", 0, "0.2"), "degree": ("degree", 9)}[digit])(record)
    refused(json.dumps(record), "sha256 must match the content.*unchanged copy.*CSV")


def test_layout_does_not_matter_to_the_checksum():
    record = json.loads(TEXTS["json"])
    shuffled = json.dumps(dict(reversed(record.items())), indent=7)
    assert parse(shuffled, "t") == vertices_and_centre()


@pytest.mark.parametrize("part", [0.02, 0.3, 0.6, 0.9, 0.999])
def test_truncated_json_is_called_cut_short(part):
    text = TEXTS["json"].rstrip()
    refused(text[: int(len(text) * part)], "must be complete JSON; got a file that is cut short")


@pytest.mark.parametrize("text", [TEXTS["csv"], TEXTS["text"], FLAT_TEXTS["csv"], FLAT_TEXTS["text"]], ids=range(4))
def test_a_table_that_lost_its_last_rows_is_refused(text):
    lines = text.rstrip("\n").split("\n")
    for count in range(1, len(lines)):
        refused("\n".join(lines[:count]), r".*")


def test_csv_says_how_many_rows_are_missing():
    refused(TEXTS["csv"].rstrip("\n").rpartition("\n")[0], r"as many rows as the header says, 4; got 3.*cut short")


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (put("format", "other"), "format must be 'simplexcub-rule'; got 'other'"),
        (put("version", 2), "version must be 1; got 2"),
        (put("version", True), "version must be 1; got True"),
        (without("degree"), "must have the key 'degree'"),
        (put("colour", "red"), "must hold no keys but .*; got 'colour'"),
        (put("degree", "7"), "degree must be an integer; got '7'"),
        (put("degree", 7.0), "degree must be an integer; got 7.0"),
        (put("degree", True), "degree must be an integer; got True"),
        (put("degree", -1), "degree must lie between 0 and 10000; got -1"),
        (put("digits", 0), "digits must lie between 1 and 4000; got 0"),
        (put("digits", 10**9), "digits must lie between"),
        (put("space", "some"), "space must be one of all, symmetric, ordered; got 'some'"),
        (put("symmetry", "a\nb"), "symmetry must be the name of a group"),
        (put("equal_weights", 1), "equal_weights must be true or false; got 1"),
        (put("equal_weights", True), "weights must be equal where equal_weights is true"),
        (put("measure", "family", "round"), "measure must be one of flat"),
        (put("measure", "N", 1), "N must be an integer of at least 2; got 1"),
        (put("measure", "N", 10**9), "N must be an integer of at most 10000"),
        (put("measure", "K", "3"), "K must be an integer of at most"),
        (put("measure", {"family": "dirichlet", "alpha": [0.5, 1]}), "alpha must be a list of strings"),
        (put("measure", {"family": "dirichlet", "alpha": ["1e9999999", "1"]}), "alpha must be a list of strings"),
        (put("measure", {"family": "dirichlet", "alpha": ["1/0", "1"]}), "alpha must hold numbers"),
        (put("measure", {}), "measure must be one of"),
        (put("nodes", 0, "x"), r"nodes\[0\] must be a list of decimals"),
        (put("nodes", 0, ["1", "0"]), r"nodes\[0\] must hold 3 numbers; got 2"),
        (put("nodes", 0, 0, 1), r"nodes\[0\] must be a list of decimals in quotes"),
        (put("nodes", 0, 0, "one"), r"nodes\[0\]\[0\] must be a decimal number such as 0.25; got 'one'"),
        (put("nodes", 0, 0, "nan"), "must be a decimal number"),
        (put("nodes", 0, 0, "１"), "must be a decimal number"),
        (put("nodes", 0, 0, "1_0"), "must be a decimal number"),
        (put("nodes", 0, 0, "1e99999999"), "exponent must lie within ±4000"),
        (put("nodes", 0, 0, "0." + "1" * 4000), "at most 4000 characters; got 4002"),
        (put("nodes", 0, 0, "0.9"), "the coordinates of node 1 must sum to 1; got 0.9"),
        (put("nodes", 0, ["1.5", "-0.5", "0"]), "the coordinates of node 1 must be at least 0; got -0.5"),
        (put("nodes", []), "weights must hold 0 numbers; got 4"),
        (put("weights", ["1"]), "weights must hold 4 numbers; got 1"),
        (put("weights", 0, "0.15333333"), r"weights must sum to 1; got 1.01999999667. Divide the weights by their sum"),
        (put("orbits", 0, "values", 0, "0.9"), "orbits must expand to the nodes"),
        (put("orbits", 0, "multiplicities", [3]), r"values must hold 1 numbers; got 2"),
        (put("orbits", 0, "multiplicities", [0, 3]), "multiplicities must be positive and sum to N = 3"),
        (put("orbits", 0, "multiplicities", []), "multiplicities must be positive and sum to N = 3"),
        (put("orbits", 0, "multiplicities", ["1", "2"]), "multiplicities must hold integers"),
        (put("orbits", 0, 7), r"orbits\[0\] must be an object"),
        (put("verification", "worst_exponents", [1.5]), "worst_exponents must hold integers"),
        (put("verification", "max_residual", "small"), "max_residual must be a decimal number"),
        (put("verification", "positive", "yes"), "positive must be true or false"),
        (put("provenance", "seed", None), "seed must be an integer; got None"),
        (without("provenance", "method"), "provenance must have the key 'method'"),
    ],
    ids=str,
)
def test_forged_fields_are_named(change, message):
    refused(forged(change), message)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('{"a": 1, "a": 2}', "every key must occur once; got 'a'"),
        ('{"format": NaN}', "numbers must be finite; got NaN"),
        ('{"format": -Infinity}', "numbers must be finite; got -Infinity"),
        ("[1, 2]", "must hold one JSON object; got list"),
        ("{}", "format must be"),
        ('{"format": "simplexcub-rule", "version": 1}', "must carry its sha256"),
        ('{"format": "simplexcub-rule", "version": 1, "sha256": "\\ud800", "x": "\\ud800"}', "unpaired surrogate"),
        ('{"format": "simplexcub-rule", "version": 1, "sha256": 5}', "sha256 must match"),
        ('{"a" 1}', "Expecting ':' delimiter at line 1, column 6"),
        ("[" * 100_000, "nesting or numbers beyond all sense|cut short"),
        ('{"a": ' + "1" * 5000 + "}", "nesting or numbers beyond all sense"),
        ('{"nodes": 1, "weights": [1]}', "must be lists of one length"),
        ('{"nodes": [1], "weights": [1]}', "every node must be a list"),
        ('{"nodes": [[1, null]], "weights": [1]}', "None must be a decimal number"),
        ('{"nodes": [[0.5, 0.5]], "weights": [true]}', "True must be a decimal number"),
    ],
    ids=range(15),
)
def test_json_of_other_shapes(text, message):
    refused(text, message, flat(2))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "must hold rows of nodes and weights; got no rows"),
        ("# nothing\n\n", "got no rows"),
        ("x y w\n", "got no rows"),
        ("0.5\n", r"line 1: a row must hold N = 2 or N - 1 coordinates and a weight; got 1 entries"),
        ("0.5 0.5 1 1\n", "got 4 entries"),
        ("0.5 0.5 0.5\n0.5,0.5\n", "line 2: a row must hold"),
        ("x y w\nx y w\n", r"line 2: x must be a decimal number"),
        ("0.5 0,5 1\n", "a row must hold N = 2|must be a decimal number"),
        ("0.5 0.5 one\n", r"line 1: one must be a decimal number such as 0.25; got 'one'"),
        ("0.5 0.5 inf\n", "inf must be a decimal number"),
        ("0.5 0.5 1e999999999\n", "exponent"),
        ("0.5 0.5 " + "1" * 20_000, "at most 4000 characters"),
        ("0.5 0.5 1.02\n", "weights must sum to 1; got 1.02. Divide"),
        ("0.5 0.5 0.5\n0 1 0.52\n", "weights must sum to 1; got 1.02"),
        ("0.5 0.5 -1\n", "weights must sum to 1; got -1"),
        ("1.5 -0.5 1\n", "the coordinates of node 1 must be at least 0; got -0.5"),
        ("0.5 0.6 1\n", "the coordinates of node 1 must sum to 1; got 1.1"),
        ("1 0 0.5\n0.3333333 0.6667668 0.5\n", "the coordinates of node 2 must sum to 1; got 1.0001001"),
    ],
    ids=range(18),
)
def test_rows_that_are_no_rule(text, message):
    refused(text, message, flat(2))


@pytest.mark.parametrize(
    "text",
    ["0.3333 0.6667 0.500\n0.6667 0.3334 0.500\n", "0.333333 0.666667 0.3333\n0.666667 0.333333 0.3333\n0 1 0.3333\n"],
)
def test_rounding_in_the_last_printed_place_is_no_fault(text):
    assert len(parse(text, "t", flat(2))) in (2, 3)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("# degree: 2", "# degree: two", "line .*: degree must be JSON; got 'two'"),
        ("# degree: 2", "# degree: 2\n# degree: 3", "every key must occur once; got 'degree'"),
        ("# degree: 2\n", "", "must have the key 'degree'"),
        ("# degree: 2", "# colour: red", "the header must hold known keys only; got 'colour'"),
        ("# space: all", "# space: half", "space must be one of"),
        ("# nodes: 4", "# nodes: 5", "as many rows as the header says, 5; got 4"),
        ("lambda_1", "0.5,0.5", "every row must hold|must be a decimal number"),
        ("0.0,0.0,0.1", "0.0,0.1,0.1", "the coordinates of node 1 must sum to 1; got 1.1"),
    ],
)
def test_csv_edited_out_of_shape(old, new, message):
    assert old in TEXTS["csv"]
    refused(TEXTS["csv"].replace(old, new, 1), message)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("  exact for", "  claims for", "must state 'exact for'"),
        ("polynomial of degree ≤ 2", "polynomial up to 2", "'exact for' must be as it was written"),
        ("4 in 2 orbits", "four", "nodes must be a whole number; got 'four'"),
        ("4 in 2 orbits", "5 in 2 orbits", "there must be 5 nodes; got 4"),
        (", seed 0", "", "'made by' must name package, seed and date"),
        ("hilbert-schmidt, N = 3", "hilbert-schmidt, N = x", "N must be an integer"),
        ("hilbert-schmidt, N = 3, K = 3", "flat, N = 4", "must fit its pattern and the measure"),
        ("a b b", "a b c", "must fit its pattern and the measure; got a b c"),
        ("a b b", "A B B", "must have a pattern such as a b b"),
        ("a b b", "a×9999 b×9999", "must fit its pattern"),
        ("  b   0.0", "  b   zero", "b must be a decimal number"),
        ("  b   0.0", "  a   0.0", "the columns must be as they were written"),
        ("3333333333 3333333333", "3333333333   3333333333", "the columns must be as they were written"),
    ],
)
def test_text_edited_out_of_shape(old, new, message):
    assert old in TEXTS["text"]
    refused(TEXTS["text"].replace(old, new, 1), message)


def test_a_pattern_cannot_ask_for_more_nodes_than_memory_holds():
    letters = "abcdefghijklmnopqrstuv"
    hostile = forged(
        lambda record: record.update(
            measure={"family": "flat", "N": 22},
            nodes=[["1", *["0"] * 21]],
            weights=["1"],
            orbits=[{"multiplicities": [1] * 22, "values": ["1", *["0"] * 21], "weight": "1"}],
        )
    )
    refused(hostile, "orbits must expand to the nodes")
    text = TEXTS["text"].replace("hilbert-schmidt, N = 3, K = 3", "flat, N = 22")
    refused(text.replace("a b b", " ".join(letters), 1), "must fit its pattern and the measure")


def outcome(text, measure=None):
    """A message and perhaps a rule; anything but our own errors comes through."""
    try:
        return "", parse(text, "file", measure)
    except InputError as error:
        return (str(error),)


SOURCES = [
    render(rule, to).encode()
    for rule in (simpson(), vertices_and_centre(16), two_spectra())
    for to in ("json", "csv", "text")
]


@settings(max_examples=600)
@given(st.sampled_from(SOURCES), st.data())
def test_no_mutation_of_a_table_raises_anything_but_our_errors(source, data):
    """Bytes flipped, cut out, doubled or put in: read back as a rule, or refused in one line."""
    mutated = bytearray(source)
    for _ in range(data.draw(st.integers(1, 4))):
        place = data.draw(st.integers(0, len(mutated)))
        length = data.draw(st.integers(0, 12))
        mutated[place : place + length] = data.draw(
            st.binary(max_size=6)
            | st.sampled_from([b'"', b"}", b"[", b",", b"\n", b"-", b"e9", b"99", b"null", b"#", b"  "])
        )
    text = bytes(mutated).decode("utf-8", errors="replace")
    found = outcome(text, flat(2))
    assert "\n" not in found[0]
    assert all(abs(sum(map(float, rule.weight_decimals)) - 1) < 1e-3 for rule in found[1:])


@settings(max_examples=300)
@given(st.data())
def test_no_forgery_of_a_record_raises_anything_but_our_errors(data):
    """Any value in any place, under a checksum that fits."""
    anything = st.recursive(
        st.none()
        | st.booleans()
        | st.integers(-5, 10**6)
        | st.floats(allow_nan=False, allow_infinity=False)
        | st.text(max_size=5),
        lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
        max_leaves=4,
    )

    def change(record):
        node = record
        while True:
            key = data.draw(st.sampled_from(sorted(node) if isinstance(node, dict) else range(len(node))))
            if not isinstance(node[key], dict | list) or not node[key] or data.draw(st.booleans()):
                break
            node = node[key]
        node[key] = data.draw(anything)

    assert "\n" not in outcome(forged(change))[0]
