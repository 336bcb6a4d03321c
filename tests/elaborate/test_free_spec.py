"""CNFs over their free variables as specs: the same models, and circuits that are verified against them."""

from __future__ import annotations

from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.api import build, verify
from revsynth.elaborate.free_spec import free_spec
from revsynth.errors import SpecError
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import count_ones
from revsynth.spec.bench import parse_bench
from revsynth.spec.clause_columns import clauses_column
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Clauses, Predicate
from revsynth.spec.understand import understand


def clauses_of_gates(rng: Random, variables: int) -> Clauses:
    """Each variable from the fourth on an AND or XOR of two before it, a few constraints, an XOR clause."""
    clauses: list[tuple[int, ...]] = []
    for d in range(4, variables + 1):
        a, b = (rng.choice((v, -v)) for v in rng.sample(range(1, d), 2))
        both = [(d, -a, -b), (-d, a), (-d, b)]
        odd = [(-d, a, b), (-d, -a, -b), (d, -a, b), (d, a, -b)]
        clauses += both if rng.random() < 0.5 else odd
    clauses += [tuple(rng.choice((v, -v)) for v in rng.sample(range(1, variables + 1), 2)) for _ in range(2)]
    rng.shuffle(clauses)
    return Clauses(variables, tuple(clauses), ((1, variables),) if rng.random() < 0.3 else ())


def text_of(clauses: Clauses) -> str:
    lines = [f"p cnf {clauses.variables} {len(clauses.clauses) + len(clauses.xor_clauses)}"]
    lines += [" ".join(map(str, (*clause, 0))) for clause in clauses.clauses]
    lines += ["x" + " ".join(map(str, (*clause, 0))) for clause in clauses.xor_clauses]
    return "\n".join(lines) + "\n"


@given(st.integers(4, 12), st.integers(0, 2**32))
def test_the_spec_and_the_network_are_one_function_with_as_many_models(variables: int, seed: int) -> None:
    clauses = clauses_of_gates(Random(seed), variables)
    made = free_spec(parse_dimacs(text_of(clauses)), "low")
    assert made.spec.input_bits == len(made.found.variables) <= 3
    function = understand(made.spec).function
    assert function.values.tolist() == tabulate(made.found.function.values).tolist()
    assert function.marked == count_ones(clauses_column(clauses))


def test_the_choice_of_free_variables_depends_on_the_cnf_alone() -> None:
    spec = parse_dimacs(text_of(clauses_of_gates(Random(3), 12)))
    one, other = free_spec(spec, "low", 0), free_spec(spec, "normal", 5)
    assert one.found.variables == other.found.variables
    assert one.spec == other.spec
    assert one.spec.labels == {
        f"v[{bit}]": f"variable {variable}" for bit, variable in enumerate(one.found.variables)
    }


def test_a_circuit_over_the_free_variables() -> None:
    # 3 = 1 AND 2, 4 = 3 XOR 1, and 4 is wanted: 1 and not 2
    spec = parse_dimacs(
        "p cnf 4 8\n3 -1 -2 0\n-3 1 0\n-3 2 0\n-4 3 1 0\n-4 -3 -1 0\n4 -3 1 0\n4 3 -1 0\n4 0\n"
    )
    made = free_spec(spec)
    assert len(made.spec.inputs) == 1
    assert understand(made.spec).function.marked == 1
    built = build(made.spec)
    assert verify(made.spec, text=built.text("openqasm3")).holds is True


def test_only_a_cnf_has_free_inputs() -> None:
    with pytest.raises(SpecError, match="free inputs are for a CNF: other specs define no inputs by others"):
        free_spec(parse_bench("INPUT(a)\nOUTPUT(f)\nf = NOT(a)\n"))
    assert isinstance(free_spec(parse_dimacs("p cnf 2 1\n1 2 0\n")).spec.body, Predicate)
