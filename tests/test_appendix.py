"""Print: rounding that is honest, tables that fit, sources that are named, documents that compile."""

from __future__ import annotations

import re
import shutil
import subprocess
from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import pytest
from conftest import Call
from test_table import RULES, simpson, vertices_and_centre, with_negative_weight

from simplexcub.decimals import significant_digits
from simplexcub.errors import InputError
from simplexcub.measures import bures, flat, hilbert_schmidt
from simplexcub.rule import Rule
from simplexcub.table import catalogue, load, parse, render
from simplexcub.table.appendix import appendix
from simplexcub.table.as_latex import fragment
from simplexcub.table.describe import heading
from simplexcub.table.overview import by_name, name_of
from simplexcub.table.rounding import rounded, rounded_text
from simplexcub.table.sources import numbered, sources
from simplexcub.table.tex import SIZES, number, prose
from simplexcub.verify import verify


def _has_tex() -> bool:
    """Whether pdflatex and the packages of a Debian texlive-latex-recommended are here."""
    if shutil.which("pdflatex") is None or shutil.which("kpsewhich") is None:
        return False
    styles = ("booktabs.sty", "longtable.sty", "geometry.sty")
    return subprocess.run(("kpsewhich", *styles), capture_output=True, check=False).returncode == 0


needs_tex = pytest.mark.skipif(
    not _has_tex(),
    reason="pdflatex with booktabs is not on this machine (Debian: apt-get install texlive-latex-recommended)",
)


def compiled(text: str, where: Path) -> str:
    """The log of the second run of pdflatex, when the widths of long tables have settled."""
    (where / "it.tex").write_text(text, encoding="utf-8")
    command = ("pdflatex", "-interaction=nonstopmode", "-halt-on-error", "it.tex")
    for _ in range(2):
        subprocess.run(command, cwd=where, capture_output=True, check=True, timeout=120)
    return (where / "it.log").read_text(encoding="latin-1")


def article(body: str) -> str:
    """A plain article, whose text is 345 pt wide."""
    return "\\documentclass{article}\\usepackage{booktabs,longtable}\\begin{document}\n" + body + "\\end{document}\n"


# Compiled for real


@needs_tex
@pytest.mark.parametrize("digits", [16, 34, 50])
def test_a_standalone_appendix_compiles_without_overfull_boxes(call: Call, digits: int, tmp_path: Path) -> None:
    path = tmp_path / "appendix.tex"
    pattern = "tables/hilbert-schmidt/N3/*"
    options = ("--to", "latex", "--standalone", "--up-to", 10, "--digits", digits, "-o", path)
    assert call("export", pattern, *options) == (0, [], [])
    log = compiled(path.read_text(encoding="utf-8"), tmp_path)
    assert "Overfull" not in log
    assert (tmp_path / "it.pdf").stat().st_size > 50_000


@needs_tex
def test_fragments_fit_a_plain_article(tmp_path: Path) -> None:
    shipped = [load(bures(2), degree=9), load(hilbert_schmidt(6), degree=4), load(flat(5), degree=6)]
    rules = [*RULES.values(), *shipped]
    body = "\n".join(render(rule, "latex") for rule in rules) + appendix(
        [r.verified(verify(r).verification) for r in shipped]
    )
    assert "Overfull" not in compiled(article(body), tmp_path)


@needs_tex
def test_a_table_for_a_wider_page_does_not_fit_and_is_noticed(tmp_path: Path) -> None:
    rule = load(hilbert_schmidt(3), degree=4)
    wide = "\n".join(fragment(rule, 5000.0))
    assert "Overfull" in compiled(article(wide), tmp_path)


@needs_tex
def test_the_overview_compiles(call: Call, tmp_path: Path) -> None:
    _, out, _ = call("tables", "--to", "latex")
    assert "Overfull" not in compiled(article("\n".join(out) + "\n"), tmp_path)


# What it says


def test_one_line_per_orbit_with_its_pattern_and_how_to_expand_it() -> None:
    rule = rounded(load(hilbert_schmidt(3), degree=4, symmetry="full"), 10)
    text = render(rule, "latex")
    body = text.split("\\endlastfoot\n")[1].split("\\end{longtable}")[0].strip().splitlines()
    assert len(body) == len(rule.orbits) == 2
    assert [re.findall(r"\$a\\,a\\,b\$", line) for line in body] == [[r"$a\,a\,b$"]] * 2
    assert "Every different ordering of an orbit's pattern is a node" in text
    assert r"Pattern $a\,a\,b$ stands for $(a,a,b)$, $(a,b,a)$, $(b,a,a)$." in text


def test_the_caption_names_measure_density_normalisation_and_digits() -> None:
    caption = re.search(r"\\caption\{(.*)\}\\\\", render(load(hilbert_schmidt(3), degree=7), "latex"))[1]
    for needed in (
        "Hilbert--Schmidt eigenvalue measure, $N=3$",
        r"$1680\,\prod_{i<j}(\lambda_i-\lambda_j)^2$ with respect to",
        "of total mass~1; weights sum to~1",
        "rounded to 50 significant digits",
        r"every polynomial of degree $\le$ 7",
    ):
        assert needed in caption


def test_full_form_lists_every_node() -> None:
    rule = load(hilbert_schmidt(3), degree=4, symmetry="full")
    lines = render(rounded(replace(rule, orbits=()), 12), "latex").splitlines()
    assert sum(bool(re.match(r"\d+ & \$0\.", line)) for line in lines) == len(rule) == 6


def test_sources_are_those_of_the_methods_used() -> None:
    def short(rule: Rule) -> set[str]:
        return {source.short for these in sources(rule).values() for source in these}

    assert short(load(flat(2), degree=3)) == {"Golub & Welsch 1969", "Krawczyk 1969", "Kantorovich & Akilov 1982"}
    assert "Möller 1979" in short(load(flat(3), degree=5))
    assert "Möller 1979" not in short(load(flat(3), degree=6))
    assert "Sommers & Życzkowski 2003" in short(load(bures(3), degree=4))
    by_hand = vertices_and_centre()
    assert short(by_hand.verified(verify(by_hand).verification)) == {"Życzkowski & Sommers 2001"}


def test_every_source_is_cited_and_every_citation_listed() -> None:
    rules = [load(flat(2), degree=3), load(bures(3), degree=5), load(hilbert_schmidt(3), degree=4)]
    text = appendix(rules, standalone=True)
    listed = {int(k) for k in re.findall(r"\\makebox\[2em\]\[l\]\{\[(\d+)\]\}", text)}
    cited = {
        int(k)
        for group in re.findall(r" \[([\d, ]+)\]|:\s?\[([\d, ]+)\]", text)
        for k in re.findall(r"\d+", "".join(group))
    }
    assert listed == cited == set(numbered(rules).values())
    for source in numbered(rules):
        assert prose(source.full) in text
        assert "?" not in prose(source.full)


def test_an_appendix_is_sorted_and_has_an_overview() -> None:
    rules = [load(flat(3), degree=t) for t in (7, 2, 5)]
    text = appendix(rules)
    assert re.findall(r"exact for every polynomial of degree \$\\le\$ (\d)", text) == ["2", "5", "7"]
    overview = text.split(r"\endlastfoot")[1].split(r"\end{longtable}")[0]
    assert [line.split(" & ")[1] for line in overview.strip().splitlines()] == ["2", "5", "7"]
    assert r"\documentclass" not in text
    assert appendix(rules, standalone=True).count(r"\documentclass") == 1


def test_what_is_special_tells_rules_of_one_degree_apart() -> None:
    names = ("flat/N3/all-full-t04-6", "flat/N3/all-full-embedded-t04-6", "flat/N3/all-full-equal-t02-3")
    rules = [by_name(name) for name in names]
    text = appendix(rules)
    overview = text.split(r"\endlastfoot")[1].split(r"\end{longtable}")[0].strip().splitlines()
    cells = [line.removesuffix(r" \\").split(" & ") for line in overview]
    assert [(line[1], line[-1]) for line in cells] == [("2", "equal weights"), ("4", ""), ("4", "embedded to degree 1")]
    captions = re.findall(r"\\caption\{Flat measure, \$N=3\$: (.*?), exact for", text)
    assert captions == [
        "3 nodes in 1 orbit, equal weights",
        "6 nodes in 2 orbits",
        "6 nodes in 2 orbits, embedded to degree 1",
    ]
    assert "special" not in appendix([rules[0], load(flat(3), degree=5)])
    assert heading(rules[1]) == "Flat measure, N = 3, degree 4, 6 nodes, embedded to degree 1"
    assert heading(rules[2]) == "Flat measure, N = 3, degree 2, 3 nodes, equal weights"


@needs_tex
def test_an_overview_with_every_kind_fits_a_plain_article(tmp_path: Path) -> None:
    names = [n for n in map(name_of, catalogue()) if "/N3/" in n and re.search("-(equal|embedded|also)-.*t0[1-5]", n)]
    rules = [by_name(name) for name in [*names, "bures/N4/all-full-t03-8"] if name in map(name_of, catalogue())]
    assert len({rule.measure.family for rule in rules}) > 1
    assert "Overfull" not in compiled(article(appendix(rules)), tmp_path)


def test_numbers_break_only_where_they_must() -> None:
    assert number("0.1234567", 10**6) == [r"$0.12345\,67$"]
    assert number("-0.1234567890123", 10) == [r"$-0.12345\,67890$", r"\phantom{$-0.$}$123$"]
    size = SIZES[0]
    assert size.digits_within(size.number("0." + "1" * 40) + 3 * size.digit) >= 40
    assert size.number("0." + "1" * 40) < size.number("0." + "1" * 41) < size.number("-0." + "1" * 41)


# Rounding


@pytest.mark.parametrize(
    ("text", "digits", "expected"),
    [
        ("0.0125", 2, "0.012"),  # half to even
        ("0.0135", 2, "0.014"),
        ("0.99996", 4, "1.000"),
        ("-0.5625", 3, "-0.562"),
        ("0.000012345", 3, "0.0000123"),
        ("1", 5, "1"),
        ("0.5", 1, "0.5"),
    ],
)
def test_decimals_are_rounded_half_to_even(text: str, digits: int, expected: str) -> None:
    assert rounded_text(text, digits) == expected


@pytest.mark.parametrize("measure", [flat(2), hilbert_schmidt(3), bures(4), flat(6)], ids=str)
@pytest.mark.parametrize("digits", [7, 16, 34])
def test_a_rounded_rule_says_so_and_holds(measure, digits: int) -> None:
    rule = load(measure, degree=5)
    short = rounded(rule, digits)
    assert short.digits == digits
    assert all(significant_digits(x) <= digits for node in short.node_decimals for x in node)
    assert f"rounded from {rule.digits} digits" in short.provenance.method
    assert verify(short).holds
    # The error that it states is that of the rounded numbers, larger than that of the whole ones.
    found = Decimal(short.verification.max_residual)
    assert Decimal(rule.verification.max_residual) < found < Decimal(10) ** (1 - digits)
    assert short.verification.fails_at_degree == rule.verification.fails_at_degree
    assert short.verification.lower_bound == rule.verification.lower_bound


def test_the_radius_of_a_rounded_proof_covers_the_change() -> None:
    rule = load(hilbert_schmidt(3), degree=7)
    short = rounded(rule, 20)
    changes = [
        abs(Fraction(a) - Fraction(b))
        for a, b in zip(
            [*(x for node in rule.node_decimals for x in node), *rule.weight_decimals],
            [*(x for node in short.node_decimals for x in node), *short.weight_decimals],
            strict=True,
        )
    ]
    radius = Fraction(Decimal(short.verification.proof["radius"]))
    needed = max(changes) + Fraction(Decimal(rule.verification.proof["radius"]))
    assert needed <= radius < Fraction(11, 10) * needed
    assert f"within {short.verification.proof['radius']} of the printed numbers" in render(short, "text")


def test_rounding_to_all_digits_changes_nothing_and_to_more_is_refused() -> None:
    rule = load(flat(3), degree=3)
    assert rounded(rule, 50) is rule
    for digits in (0, 51, -3):
        with pytest.raises(InputError, match=f"digits must lie between 1 and those of the table, 50; got {digits}"):
            rounded(rule, digits)


def test_rules_without_proof_or_verification_can_be_rounded() -> None:
    short = rounded(with_negative_weight(), 10)
    assert short.verification.proof is None
    assert not short.verification.positive
    assert verify(short).holds
    assert rounded(simpson(), 5).weight_decimals == ("0.16667", "0.66667", "0.16667")


@pytest.mark.parametrize("to", ["json", "csv", "text"])
@pytest.mark.parametrize("digits", [16, 34])
def test_rounded_rules_read_back_with_identical_digits(to: str, digits: int) -> None:
    short = rounded(load(hilbert_schmidt(3), degree=7), digits)
    assert parse(render(short, to), "file") == short
    by_node = replace(short, orbits=())
    assert parse(render(by_node, to), "file") == by_node
