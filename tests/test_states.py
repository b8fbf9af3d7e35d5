"""Sets of state vectors whose degree is known: complete mutually unbiased bases and a tetrahedron."""

import itertools

import numpy as np
import pytest

from simplexcub.cli import main
from simplexcub.errors import InputError, TableError
from simplexcub.measures import flat, induced
from simplexcub.verify import verify
from simplexcub.verify.states import moduli_rule, normalised, read_states, reduced_rule

X = np.array([[0, 1], [1, 0]])
Y = np.array([[0, -1j], [1j, 0]])
Z = np.diag([1, -1])


def unbiased_bases(p):
    """W. K. Wootters, B. D. Fields, Annals of Physics 191 (1989) 363: p + 1 bases for an odd prime; 3 for p = 2."""
    if p == 2:
        rows = [[1, 0], [0, 1], [1, 1], [1, -1], [1, 1j], [1, -1j]]
        return normalised(np.array(rows, dtype=complex))
    w = np.exp(2j * np.pi / p)
    bases = [[w ** (a * k * k + j * k) for k in range(p)] for a in range(p) for j in range(p)]
    return normalised(np.array([*np.eye(p), *bases], dtype=complex))


def tetrahedron():
    """Four qubit states whose Bloch vectors are the corners of a regular tetrahedron."""
    corners = [np.sqrt([1 / 3, 2 / 3]) * [1, np.exp(2j * np.pi * k / 3)] for k in range(3)]
    return np.array([[1, 0], *corners], dtype=complex)


def two_qubit_bases():
    """Five mutually unbiased bases of two qubits: the common eigenvectors of commuting pairs of Pauli products."""
    pairs = [((Z, Z), 1), ((X, X), 1), ((Y, Y), 1), ((X, Y), 0), ((Y, X), 0)]
    one = np.eye(2)
    rows = []
    for (a, b), product in pairs:
        if product:
            observable = np.kron(a, one) + 3 * np.kron(one, b)
        elif np.array_equal(a, X):
            observable = np.kron(X, Y) + 3 * np.kron(Y, Z)
        else:
            observable = np.kron(Y, X) + 3 * np.kron(Z, Y)
        rows += list(np.linalg.eigh(observable)[1].T)
    return np.array(rows, dtype=complex)


def test_the_bases_are_unbiased():
    for states, d in ((unbiased_bases(2), 2), (unbiased_bases(3), 3), (two_qubit_bases(), 4)):
        bases = states.reshape(d + 1, d, d)
        for a, b in itertools.combinations(bases, 2):
            assert np.abs(a.conj() @ b.T) ** 2 == pytest.approx(np.full((d, d), 1 / d))


@pytest.mark.parametrize(
    ("states", "space", "degree"),
    [
        (unbiased_bases(2), "all", 3),
        (unbiased_bases(3), "all", 2),
        (unbiased_bases(5), "all", 2),
        (tetrahedron(), "all", 2),
        (tetrahedron(), "symmetric", 3),
        (unbiased_bases(2)[:4], "all", 1),
    ],
)
def test_squared_moduli(states, space, degree):
    rule = moduli_rule(states, space)
    assert rule.measure == flat(states.shape[1])
    report = verify(rule, prove=True)
    assert report.holds
    assert report.exact_degree == degree
    assert report.proof.holds


def test_reduced_spectra_of_two_qubits():
    rule = reduced_rule(two_qubit_bases(), 2, 2)
    assert rule.measure == induced(2, 2)
    report = verify(rule, prove=True)
    # Mean purity 4/5 from 12 product and 8 maximally entangled states; odd degrees follow for two eigenvalues.
    assert report.exact_degree == 3
    assert report.proof.holds


def test_reduction_keeps_the_smaller_factor():
    states = np.eye(6, dtype=complex)
    assert reduced_rule(states, 2, 3).measure == induced(2, 3)
    assert reduced_rule(states, 3, 2).measure == induced(2, 3)
    with pytest.raises(InputError, match="product 6"):
        reduced_rule(states, 2, 2)


def test_norm_and_phase_of_the_vectors_do_not_matter(tmp_path):
    path = tmp_path / "states.npy"
    np.save(path, unbiased_bases(3) * 7j)
    assert moduli_rule(read_states(path)).node_decimals == moduli_rule(unbiased_bases(3)).node_decimals


def test_the_command_reads_both_forms(tmp_path, capsys):
    states = unbiased_bases(2)
    binary, rows = tmp_path / "states.npy", tmp_path / "states.csv"
    np.save(binary, states)
    columns = np.column_stack([part for z in states.T for part in (z.real, z.imag)])
    body = "\n".join(",".join(repr(float(x)) for x in row) for row in columns)
    rows.write_text(f"re1,im1,re2,im2\n{body}\n", encoding="utf-8")
    outputs = []
    for path in (binary, rows):
        assert main(["verify", "--states", str(path)]) == 0
        outputs.append(capsys.readouterr().out)
    assert outputs[0] == outputs[1]
    assert "exact     to degree 3" in outputs[0]
    assert "space all" in outputs[0]
    assert "space symmetric" in outputs[0]
    np.save(binary, two_qubit_bases())
    assert main(["verify", "--states", str(binary), "--reduce", "2,2"]) == 0
    assert f"measure   {induced(2, 2)}" in capsys.readouterr().out


@pytest.mark.parametrize(
    "options", [("--reduce", "2,2"), ("--states", "--reduce", "2"), ("--states", "--measure", "flat"), ("-t", "3")]
)
def test_options_that_do_not_go_together(options, tmp_path, capsys):
    path = tmp_path / "states.npy"
    np.save(path, two_qubit_bases())
    assert main(["verify", str(path), *options]) == 2
    assert len(capsys.readouterr().err.splitlines()) == 1


class Payload:
    def __reduce__(self):
        return (print, ("executed",))


def hostile_states():
    shape = b"{'descr': '<c16', 'fortran_order': False, 'shape': (99999999999, 9), }"
    header = shape + b" " * (117 - len(shape)) + b"\n"
    return {
        "a promise": b"\x93NUMPY\x01\x00" + len(header).to_bytes(2, "little") + header,
        "cut short": b"\x93NUMPY\x01",
        "text": b"hello",
        "nothing": b"",
        "zeros": b"0,0,0,0\n",
        "odd": b"1,0,1\n",
        "ragged": b"1,0,0,0\n1,0\n",
        "nan": b"1,0,nan,0\n",
        "inf": b"1,0,inf,0\n",
        "no text": bytes(range(256)),
        "one column": b"1,0\n0,1\n",
    }


@pytest.mark.parametrize("kind", list(hostile_states()))
def test_hostile_states_are_one_line(kind, tmp_path, capsys):
    path = tmp_path / "states"
    path.write_bytes(hostile_states()[kind])
    assert main(["verify", "--states", str(path)]) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert len(captured.err.splitlines()) == 1


def test_objects_are_never_loaded(tmp_path, capsys):
    path = tmp_path / "states.npy"
    np.save(path, np.array([[Payload(), Payload()]], dtype=object), allow_pickle=True)
    with pytest.raises(TableError):
        read_states(path)
    assert "executed" not in capsys.readouterr().out
    with pytest.raises(InputError):
        read_states(tmp_path / "missing.npy")
