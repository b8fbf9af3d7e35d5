"""The forms for people and programs: all digits are there, all facts are there, and programs really run them."""

import ast
import io
import re
import subprocess
import sys
from dataclasses import replace

import numpy as np
import pytest
from conftest import package_environment
from test_table import BY_HAND, RULES, simpson, two_spectra, vertices_and_centre, wide_orbits, with_negative_weight

from simplexcub.measures import dirichlet, hilbert_schmidt
from simplexcub.rule import Provenance, Rule, Verification
from simplexcub.table import FORMATS, encode, render
from simplexcub.table.describe import facts, monomial
from simplexcub.table.orbits import expand, node_weights
from simplexcub.table.program import real
from simplexcub.table.sheet import groups, multiplicities, pattern, sheet
from simplexcub.verify import verify

COMPILED = ("c", "fortran")
PROGRAMS = ("python", *COMPILED)
TEXT_FORMATS = [name for name, form in FORMATS.items() if not form.binary]


@pytest.fixture(params=RULES, ids=lambda name: name.replace(" ", "-"))
def rule(request):
    plain = RULES[request.param]
    return plain.verified(verify(plain).verification)


def decimals(rule, to):
    """What a table of the rule must show: by orbits where that says it all, else node by node."""
    shares = None if to in PROGRAMS else node_weights(rule)
    if shares is None:
        shown = {*(x for node in rule.node_decimals for x in node), *rule.weight_decimals}
        return {real(x) for x in shown} if to in COMPILED else shown
    # LaTeX prints the weight of each node of an orbit, and leaves out what that gives for all of them together.
    of_orbits = () if to == "latex" and rule.space == "all" else (orbit.weight for orbit in rule.orbits)
    return {*(v for orbit in rule.orbits for v in orbit.values), *of_orbits, *shares}


@pytest.mark.parametrize("to", TEXT_FORMATS)
def test_no_digit_is_lost(rule, to):
    text = render(rule, to)
    if to == "latex":
        # A continued number stands in the next row, under its first place.
        text = re.sub(r"\$ \\\\\*?\n[^\n]* & \\phantom\{\$-?\d+\.\$\}\$", "", text).replace(r"\,", "")
    if to == "text":
        # Blocks of ten are set apart by one blank; a continued number stands in the next row.
        text = re.sub(r"(?<=\d)(?: |\n {20,})(?=\d)", "", text)
    shown = set(re.findall(r"-?\d+(?:\.\d+)?", text))
    assert decimals(rule, to) <= shown


@pytest.mark.parametrize("to", [name for name in TEXT_FORMATS if name not in ("json", "csv", "latex", *COMPILED)])
def test_every_fact_is_stated(rule, to):
    left_out = ("space", "degree") if to == "text" else ()
    text = " ".join(render(rule, to).replace("\\", "").split())
    for label, fact, _ in facts(rule):
        if label not in left_out:
            assert label in text
            assert " ".join(fact.split()) in text


@pytest.mark.parametrize("to", [*TEXT_FORMATS, "npz"])
def test_what_every_form_carries(to):
    """Density, degree, worst error and where, first failure, bound, provenance: by any name, in every form."""
    rule = vertices_and_centre()
    found = Verification(6, "4.7e-51", (2, 1, 0), 3, True, True, 3, None)
    content = encode(rule.verified(found), to)
    text = str(np.load(io.BytesIO(content))["description"]) if to == "npz" else content.decode()
    ascii_worst = dict.fromkeys(COMPILED, "x1^2 x2")
    worst = {"json": "[2, 1, 0]", "csv": "[2, 1, 0]", "latex": r"\lambda_{1}^{2}\lambda_{2}", **ascii_worst}.get(
        to, "λ1² λ2"
    )
    error = {"latex": r"4.7\times10^{-51}"}.get(to, "4.7e-51")
    ascii_density = dict.fromkeys(COMPILED, "1680 (x1-x2)^2")
    density = {"json": "hilbert-schmidt", "latex": r"1680\,\prod_{i<j}(\lambda_i-\lambda_j)^2", **ascii_density}.get(
        to, "1680 (λ1−λ2)²"
    )
    for needed in (worst, error, density, "simplexcub 0.1.0", "2026-12-01", "written by hand", "degree", "bound"):
        assert needed in text


def test_facts_have_unique_labels(rule):
    labels = [fact.label for fact in facts(rule)]
    assert len(labels) == len(set(labels))


@pytest.mark.parametrize(
    ("exponents", "text"), [((4, 2, 1), "λ1⁴ λ2² λ3"), ((0, 12), "λ2¹²"), ((0, 0), "1"), ((), "1")]
)
def test_monomials(exponents, text):
    assert monomial(exponents) == text


def test_a_proof_is_told_and_a_failed_one_too():
    found = verify(simpson()).verification
    proof = {"method": "interval Newton", "radius": "1e-16", "holds": True}
    proven = simpson().verified(replace(found, proof=proof))
    assert "an exact rule lies within 1e-16 of the printed numbers (interval Newton)" in render(proven, "markdown")
    assert r"lies within $10^{-16}$ of the printed" in render(proven, "latex")
    failed = simpson().verified(replace(found, proof={**proof, "holds": False}))
    assert "none: interval Newton did not succeed" in render(failed, "text")


# Sheets


@pytest.mark.parametrize("rule", [two_spectra(), wide_orbits(), vertices_and_centre(), with_negative_weight()])
def test_patterns_expand_to_the_nodes(rule):
    page = sheet(rule)
    assert page.by_orbits
    assert [multiplicities(pattern(orbit)) for orbit in rule.orbits] == [orbit.multiplicities for orbit in rule.orbits]
    assert tuple(node for orbit in rule.orbits for node in expand(orbit, rule.space)) == rule.node_decimals


def test_blocks_join_to_the_number():
    for decimal in ("0." + "1234567890" * 5 + "1", "-12." + "9" * 33, "0.25", "1", "1e-30"):
        blocks = groups(decimal)
        assert "".join(blocks) == decimal
        assert len(blocks) == 1 or all(len(block) == 10 for block in blocks[1:-1])


def test_text_lines_fit_a_screen_and_columns_align(rule):
    lines = render(rule, "text").split("\n")
    assert max(map(len, lines)) <= 100
    below = next(k for k, line in enumerate(lines) if line.startswith(" ─"))
    starts = [match.start() for match in re.finditer("─+", lines[below])]
    table = [line for line in lines[below - 1 :] if line]
    # Nothing stands in the gaps between columns.
    for start in starts[1:]:
        assert {line[start - 3 : start].strip() for line in table} == {""}


# LaTeX


def test_latex_is_balanced(rule):
    text = re.sub(r"(?m)^%.*$", "", render(rule, "latex"))
    assert text.isascii()
    open_environments = []
    for kind, name in re.findall(r"\\(begin|end)\{(\w+)\}", text):
        if kind == "begin":
            open_environments.append(name)
        else:
            assert open_environments.pop() == name
    assert not open_environments
    assert text.count(r"\begingroup") == text.count(r"\endgroup") == 1
    bare = text.replace(r"\{", "").replace(r"\}", "").replace(r"\\", "").replace(r"\$", "")
    depth = np.cumsum([{"{": 1, "}": -1}.get(c, 0) for c in bare])
    assert depth.min() >= 0
    assert depth[-1] == 0
    assert bare.count("$") % 2 == 0


def test_latex_rows_have_as_many_cells_as_columns(rule):
    text = render(rule, "latex")
    columns = len(re.search(r"\\begin\{longtable\}\{@\{\}(\w+)@\{\}\}", text)[1])
    body = text.split("\\endlastfoot\n")[1].split("\\end{longtable}")[0]
    rows = [row for row in re.split(r"\\\\\*?\n", body.replace("\\addlinespace\n", "")) if row.strip()]
    spans = [2 if r"\multicolumn{2}" in row else 1 + row.replace(r"\&", "").count("&") for row in rows]
    assert set(spans) == {columns}


def test_latex_lines_of_digits_fit_the_text_width():
    text = render(vertices_and_centre(120), "latex")
    numbers = re.findall(r"\$-?\d+\.[\d\\,]+\$|\}\$[\d\\,]+\$", text)
    assert max(len(re.sub(r"\D", "", number)) for number in numbers) <= 61


def test_latex_escapes_what_others_wrote():
    odd = Provenance("50% of a_package", 0, "undated", r"C:\x{y} & #1 ~ ^ $5 Gauß–Łódź λ3")
    text = render(replace(simpson(), provenance=odd), "latex")
    assert r"50\% of a\_package" in text
    assert r"C:\textbackslash{}x\{y\} \& \#1 \textasciitilde{} \textasciicircum{} \$5" in text
    assert r"$\lambda_{3}$" in text


# Programs


@pytest.mark.parametrize("name", RULES)
def test_the_python_module_runs_alone_and_integrates(name, tmp_path):
    rule = RULES[name]
    (tmp_path / "table.py").write_text(render(rule, "python"), encoding="utf-8")
    program = (
        "import sys, table\n"
        "assert 'simplexcub' not in sys.modules\n"
        "import numpy as np\n"
        "purity = lambda x: (x**2).sum(axis=-1)\n"
        "print(repr(float(table.average(purity if table.DEGREE > 1 else lambda x: x[:, 0]))))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", program],
        cwd=tmp_path,
        env={**package_environment(), "PYTHONPATH": ""},
        capture_output=True,
        text=True,
        timeout=60,
        check=True,
    )
    measure = rule.measure
    squares = [tuple(2 * (i == j) for j in range(measure.N)) for i in range(measure.N)]
    purity = float(sum(measure.moment(a) for a in squares))
    mean = float(measure.moment((1, *[0] * (measure.N - 1))))
    assert float(done.stdout) == pytest.approx(purity if rule.degree > 1 else mean, rel=1e-14)


def test_the_python_module_keeps_digits_and_survives_odd_text(rule):
    odd = Provenance('pack"""age\\', 0, "undated", "C:\\new\\table '''")
    module = ast.parse(render(replace(rule, provenance=odd), "python"))
    values = {
        node.targets[0].id: ast.literal_eval(node.value)
        for node in module.body
        if isinstance(node, ast.Assign) and node.targets[0].id.isupper()
    }
    assert values["NODE_DECIMALS"] == rule.node_decimals
    assert values["WEIGHT_DECIMALS"] == rule.weight_decimals
    assert values["MEASURE"] == rule.measure.parameters()
    assert "C:\\new\\table '''" in ast.get_docstring(module)
    assert 'pack"""age\\' in ast.get_docstring(module)


def test_the_numpy_archive_needs_no_pickle(rule):
    with np.load(io.BytesIO(encode(rule, "npz")), allow_pickle=False) as archive:
        assert np.array_equal(archive["nodes"], rule.nodes)
        assert np.array_equal(archive["weights"], rule.weights)
        assert archive["nodes"].dtype == archive["weights"].dtype == np.float64
        assert tuple(map(tuple, archive["node_decimals"].tolist())) == rule.node_decimals
        assert tuple(archive["weight_decimals"].tolist()) == rule.weight_decimals
        assert dict(archive["description"].tolist())["status"] == "verified"


def test_markdown_rows_have_as_many_cells_as_headings(rule):
    rows = [re.findall(r"(?<!\\)\|", line) for line in render(rule, "markdown").split("\n") if line.startswith("|")]
    assert len(rows) > 2
    assert len({len(row) for row in rows}) == 1


def test_markdown_escapes_what_others_wrote():
    odd = replace(BY_HAND, method="a | b *c* `d`")
    assert r"a \| b \*c\* \`d\`" in render(replace(simpson(), provenance=odd), "markdown")


@pytest.mark.parametrize("to", TEXT_FORMATS)
def test_many_distinct_values_get_names_of_their_own(to):
    """More values than letters: an ordered spectrum of 30 different eigenvalues."""
    n = 30
    mean = dirichlet(range(1, n + 1)[::-1])
    with_moments = [mean.moment([int(i == j) for j in range(n)]) for i in range(n)]
    texts = tuple(f"{float(m):.17f}" for m in with_moments)
    rule = Rule(mean, 1, (texts,), ("1",), BY_HAND, symmetry="none", digits=16)
    assert all(text in render(rule, to).replace(r"\,", "") for text in texts)


def test_the_same_rule_gives_the_same_bytes(rule):
    for to in FORMATS:
        assert encode(rule, to) == encode(replace(rule), to)


def test_n_names_appear_in_headings():
    assert render(vertices_and_centre(), "text").split("\n")[0] == (
        "simplexcub rule   Hilbert–Schmidt eigenvalue measure, N = 3, degree 2, 4 nodes"
    )
    assert str(hilbert_schmidt(3).N) in render(vertices_and_centre(), "latex")
