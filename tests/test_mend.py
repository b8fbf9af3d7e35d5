"""Any table: Radon's rule typed by hand is recognised, proven and mended; wrong digits are refused and restored."""

from dataclasses import replace
from decimal import Decimal

import pytest

from simplexcub.cli import main
from simplexcub.errors import InputError, NothingFound, TableError
from simplexcub.measures import dirichlet, flat, hilbert_schmidt, induced
from simplexcub.table import read, save
from simplexcub.table.foreign import count_components
from simplexcub.table.reading import parse, read_bare
from simplexcub.table.shipped import folder
from simplexcub.verify import verify
from simplexcub.verify.match import candidates, match
from simplexcub.verify.mend import mend
from simplexcub.verify.misprint import corrected

TABLES = folder()
# J. Radon (1948), seven nodes, degree 5: two coordinates to 15 digits, weights with sum 1/2.
RADON = """0.333333333333333,0.333333333333333,0.1125
0.470142064105115,0.470142064105115,0.0661970763942531
0.470142064105115,0.0597158717897698,0.0661970763942531
0.0597158717897698,0.470142064105115,0.0661970763942531
0.101286507323456,0.101286507323456,0.0629695902724136
0.101286507323456,0.797426985353087,0.0629695902724136
0.797426985353087,0.101286507323456,0.0629695902724136
"""


@pytest.fixture
def radon(tmp_path):
    path = tmp_path / "radon.csv"
    path.write_text(RADON, encoding="utf-8")
    return path


def lines(capsys):
    return dict(line.split(None, 1) for line in capsys.readouterr().out.splitlines())


def test_radon_typed_by_hand_is_recognised_proven_and_mended(radon, tmp_path, capsys):
    out = tmp_path / "mended.json"
    assert main(["verify", str(radon), "--measure", "flat", "-N", "3", "--mend", str(out)]) == 0
    said = lines(capsys)
    assert said["exact"].startswith("to degree 5, 15 digits")
    assert said["symmetry"] == "full"
    assert said["proof"].startswith("proven: an exact rule lies within")
    assert "coordinate 3 from the sum 1" in said["origin"]
    assert "weights summed to the volume 1/2" in said["origin"]
    mended = read(out)
    assert (mended.degree, mended.digits, mended.symmetry) == (5, 50, "full")
    known = read(TABLES / "flat/N3/all-full-t05-7.json")
    assert set(zip(mended.node_decimals, mended.weight_decimals, strict=True)) == set(
        zip(known.node_decimals, known.weight_decimals, strict=True)
    )
    assert mended.verification.proof["holds"] is True
    assert main(["verify", str(out)]) == 0
    assert Decimal(lines(capsys)["proof"].split("within ")[1].split()[0]) < Decimal("1e-50")


def test_any_measure_finds_the_flat_one(radon, capsys):
    assert main(["verify", str(radon), "--measure", "any"]) == 0
    out = capsys.readouterr().out.splitlines()
    assert out[0] == "matches   flat(N=3) to degree 5, 15 digits"
    assert "measure   flat(N=3)" in out


def test_any_measure_of_a_table_that_names_one():
    rule = read_bare(TABLES / "hilbert-schmidt/N3/all-full-t06-12.json")
    assert (rule.degree, rule.orbits, rule.verification) == (0, (), None)
    best, *others = match(rule)
    assert (best.measure, best.exact_degree) == (hilbert_schmidt(3), 6)
    assert all(report.exact_degree < 6 for report in others)


def test_candidates():
    found = list(candidates(2))
    assert flat(2) in found
    assert induced(2, 4) in found
    assert dirichlet(["1/2", "1/2"]) in found
    assert len(set(found)) == len(found)


@pytest.mark.parametrize(
    ("rows", "count"), [([["0.2", "0.3", "0.5", "1"]], 3), ([["0.2", "0.3", "1"]], 3), ([["0.5", "1"]], 2)]
)
def test_components_are_counted_on_the_first_row(rows, count):
    assert count_components(rows) == count


def test_rows_of_two_lengths_are_refused():
    with pytest.raises(TableError, match="line 2"):
        parse("0.5,0.5,0,0.5\n0.5,0.5,0.5\n", "rows", flat(3))


def test_weights_with_sum_1_are_left_alone():
    rule = parse("1,0,0.5\n0,1,0.5\n", "rows", flat(2))
    assert rule.weight_decimals == ("0.5", "0.5")
    assert "volume" not in rule.provenance.method
    halved = parse("1,0,0,0.25\n0,1,0,0.25\n", "rows", flat(3))
    assert [Decimal(w) for w in halved.weight_decimals] == [Decimal("0.5")] * 2


@pytest.mark.parametrize(
    ("name", "node", "coordinate", "place"),
    [
        ("flat/N3/all-full-t05-7", 2, 0, 10),
        ("flat/N3/all-full-t05-7", 6, 1, 30),
        ("hilbert-schmidt/N3/all-full-t13-39", 16, 0, 12),
        ("flat/N2/all-full-t21-11", 2, 0, 20),
    ],
)
def test_one_wrong_digit_is_refused_and_restored(name, node, coordinate, place):
    rule = read(TABLES / f"{name}.json")
    nodes = [list(x) for x in rule.node_decimals]
    text = nodes[node][coordinate]
    nodes[node][coordinate] = text[:place] + str((int(text[place]) + 1) % 10) + text[place + 1 :]
    wrong = replace(rule, node_decimals=tuple(map(tuple, nodes)), orbits=())
    assert not verify(wrong).holds
    mended = mend(wrong)
    pairs = zip(
        [x for row in mended.node_decimals for x in row] + list(mended.weight_decimals),
        [x for row in rule.node_decimals for x in row] + list(rule.weight_decimals),
        strict=True,
    )
    assert max(abs(Decimal(a) - Decimal(b)) for a, b in pairs) < Decimal("2e-50")


def test_more_digits_than_the_table_has():
    rule = read(TABLES / "flat/N2/all-full-t03-2.json")
    longer = mend(rule, digits=80)
    assert longer.digits == 80
    assert verify(longer, prove=True).holds
    # (1 + 1/√3)/2: 6 x² − 6 x + 1 = 0
    x = max(int(node[0].replace(".", "")) for node in longer.node_decimals)
    places = len(longer.node_decimals[0][0].split(".")[1])
    assert abs(6 * x * x - 6 * x * 10**places + 10 ** (2 * places)) < 10 ** (2 * places - 78)


def test_a_table_without_an_exact_rule_nearby_is_not_mended(tmp_path, capsys):
    rows = tmp_path / "rows.csv"
    rows.write_text("0.9,0.1,0.5\n0.1,0.9,0.5\n", encoding="utf-8")
    out = tmp_path / "out.json"
    status = main(["verify", str(rows), "--measure", "flat", "-N", "2", "-t", "9", "--mend", str(out)])
    assert status == 1
    assert "no exact rule of degree 9" in capsys.readouterr().err
    assert not out.exists()


def test_mending_refuses_what_it_cannot_do(radon, tmp_path, capsys):
    rule = read(radon, measure=flat(3))
    with pytest.raises(InputError, match="digits"):
        mend(rule, digits=2)
    with pytest.raises(NothingFound):
        mend(replace(rule, degree=9))
    assert main(["verify", str(radon), "--measure", "flat", "-N", "3", "--mend", str(tmp_path / "x.unknown")]) == 2
    assert main(["verify", str(radon), "--measure", "flat", "-N", "3", "-t", "5"]) == 2
    assert main(["verify", str(radon), "--measure", "any", "-N", "4"]) == 2


def test_a_mended_table_reads_back(radon, tmp_path):
    mended = mend(read(radon, measure=flat(3)))
    for ending in (".json", ".csv", ".txt"):
        path = tmp_path / f"mended{ending}"
        save(mended, path)
        assert read(path) == mended


@pytest.mark.parametrize("ending", [".json", ".csv"])
@pytest.mark.parametrize(
    ("name", "place"),
    [
        ("flat/N3/all-stabiliser-t03-4", 3),
        ("flat/N3/all-stabiliser-t03-4", 30),
        ("hilbert-schmidt/N3/all-full-t05-9", 5),
    ],
)
def test_a_saved_table_with_one_wrong_digit_is_refused_and_restored(name, place, ending, tmp_path, capsys):
    known = read(TABLES / f"{name}.json")
    damaged, out = tmp_path / f"damaged{ending}", tmp_path / "restored.json"
    save(known, damaged)
    text = damaged.read_text(encoding="utf-8")
    number = known.node_decimals[1][0]
    wrong = number[:place] + str((int(number[place]) + 4) % 10) + number[place + 1 :]
    before, after = text.rsplit(number, 1)
    damaged.write_text(before + wrong + after, encoding="utf-8")
    assert main(["verify", str(damaged)]) in (1, 2)
    assert main(["verify", str(damaged), "--mend", str(out)]) == 0
    assert "damaged" in capsys.readouterr().err
    restored = read(out)
    assert sorted(restored.node_decimals) == sorted(known.node_decimals)
    assert sorted(restored.weight_decimals) == sorted(known.weight_decimals)
    assert restored.verification.proof["holds"]


def test_one_wrong_digit_of_a_weight_is_found_by_the_sum():
    known = read(TABLES / "flat/N3/all-stabiliser-t03-4.json")
    weights = list(known.weight_decimals)
    weights[2] = weights[2][:2] + str((int(weights[2][2]) + 5) % 10) + weights[2][3:]
    assert corrected(replace(known, weight_decimals=tuple(weights)), flat(3), 3) == known
    assert corrected(replace(known, weight_decimals=tuple(weights)), hilbert_schmidt(3), 3) is None
    assert corrected(known, flat(3), 3) is None  # nothing is wrong with any sum


def test_a_table_that_averages_nothing_is_not_verified(radon, capsys):
    text = radon.read_text(encoding="utf-8").replace("0.470142064105115", "0.470242064105115", 1)
    radon.write_text(text, encoding="utf-8")
    assert main(["verify", str(radon), "--measure", "flat", "-N", "3"]) == 1
    out, err = capsys.readouterr()
    assert "verified  no" in out
    assert "not even degree 1" in err
