"""Rounds of SHA-256 (FIPS 180-4) as netlist specs: the circuits that networks give are proved right."""

from __future__ import annotations

import time

import pytest

import revsynth
from revsynth.logic.network import Network
from revsynth.qasm import read
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist, NetlistGate
from revsynth.verification import verify_program
from tests import sha256_network


def netlist_of(network: Network, outputs: int) -> Netlist:
    """The same gates as a netlist: nodes are numbered alike."""
    gates = tuple(
        NetlistGate("xor" if is_xor else "and", (int(left), int(right)))
        for is_xor, left, right in zip(network.is_xor, network.left, network.right, strict=True)
    )
    return Netlist(network.inputs, gates, tuple(int(one) for one in network.outputs[:outputs]))


def spec_of(network: Network, outputs: int) -> Spec:
    netlist = netlist_of(network, outputs)
    if outputs == 1:
        return Spec((Word("v", 512),), Predicate(netlist=netlist))
    return Spec((Word("v", 512),), Outputs((Output("f", bits=outputs),), netlist=netlist))


def proved(network: Network, other: Network | None = None) -> float:
    """The circuit built for a network, against it or another form of it; seconds of the proof."""
    built = revsynth.build(
        spec_of(network, 256),
        oracle="compute",
        gates="cascade",
        effort="low",
        method="network",
        unverified=True,
    )
    program = read(built.text("openqasm3"))
    begun = time.process_time()
    verdict = verify_program(spec_of(other or network, 256), program, oracle="compute")
    assert verdict.holds, verdict.evidence
    assert verdict.evidence.level == "proved"
    return time.process_time() - begun


def test_a_few_rounds() -> None:
    assert proved(sha256_network.build(2)) < 20


def test_one_round_against_another_form() -> None:
    assert proved(sha256_network.build(1), sha256_network.build_naive(1)) < 20


@pytest.mark.slow
def test_all_rounds() -> None:
    assert proved(sha256_network.build()) < 60
