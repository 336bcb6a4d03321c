"""How long specs take to be understood: speed is measured here, none is asserted."""

from __future__ import annotations

import random

import pytest

from revsynth.spec.bristol import parse_bristol
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Predicate, Spec, Word
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand

pytestmark = pytest.mark.bench


def test_a_16_bit_predicate(benchmark) -> None:
    where = "a * b == 143 and popcount(a) < 5 or (a ^ b) % 7 == 3"
    text = f'[inputs]\na = 8\nb = 8\n[predicate]\nwhere = "{where}"\n'
    assert benchmark(lambda: understand(parse_toml(text))).function.inputs == 16


def test_a_24_bit_predicate(benchmark) -> None:
    text = '[inputs]\na = 12\nb = 12\n[predicate]\nwhere = "a * b == 1599 * 41"\n'
    found = benchmark.pedantic(lambda: understand(parse_toml(text)), rounds=2)
    assert found.function.inputs == 24


def test_a_cnf_of_20_variables_and_91_clauses(benchmark) -> None:
    rng = random.Random(20)
    clauses = [[rng.choice((1, -1)) * v for v in rng.sample(range(1, 21), 3)] for _ in range(91)]
    text = "p cnf 20 91\n" + "".join(" ".join(map(str, clause)) + " 0\n" for clause in clauses)
    assert benchmark(lambda: understand(parse_dimacs(text))).function.inputs == 20


def test_a_formula_of_5000_terms_over_16_bits(benchmark) -> None:
    rng = random.Random(16)
    text = " ^ ".join(f"(a[{rng.randrange(16)}] & ~a[{rng.randrange(16)}])" for _ in range(5000))
    spec = Spec((Word("a", 16),), Predicate(formula=text))
    assert benchmark(lambda: understand(spec)).function.inputs == 16


def test_a_permutation_of_16_bits(benchmark) -> None:
    text = '[inputs]\na = 8\nb = 8\n[permutation]\nmap = { a = "(a + 3 * b) % 256", b = "b ^ 77" }\n'
    assert benchmark(lambda: understand(parse_toml(text))).function.outputs == 16


def test_reading_a_cnf_of_4_megabytes(benchmark) -> None:
    rng = random.Random(4)
    lines = [
        " ".join(str(rng.randint(1, 50_000) * rng.choice((1, -1))) for _ in range(3)) for _ in range(210_000)
    ]
    text = "p cnf 50000 210000\n" + " 0\n".join(lines) + " 0\n"
    assert benchmark.pedantic(lambda: parse_dimacs(text), rounds=2).input_bits == 50_000


def test_reading_a_netlist_of_100000_gates(benchmark) -> None:
    rng = random.Random(5)
    lines = [
        f"2 1 {rng.randrange(w)} {rng.randrange(w)} {w} {rng.choice(('XOR', 'AND'))}"
        for w in range(512, 100_512)
    ]
    text = "100000 100512\n1 512\n1 64\n\n" + "\n".join(lines) + "\n"
    assert benchmark.pedantic(lambda: parse_bristol(text), rounds=2).input_bits == 512
