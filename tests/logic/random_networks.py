"""Random networks for property tests: hypothesis draws a seed and sizes, the gates follow from it."""

from __future__ import annotations

from random import Random

from hypothesis import strategies as st

from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder


def random_network(seed: int, inputs: int, gates: int, outputs: int, few: int = 0) -> Network:
    """Gates over earlier signals; with `few`, half the operands come from the first `few` inputs."""
    random = Random(seed)
    b = NetworkBuilder(inputs)
    pool = [b.input(i) for i in range(inputs)]
    for _ in range(gates):
        one = random.choice(pool) ^ random.getrandbits(1)
        other = random.choice(pool[:few] if few and random.getrandbits(1) else pool) ^ random.getrandbits(1)
        pool.append(b.xor(one, other) if random.getrandbits(1) else b.and_(one, other))
    return b.build([random.choice(pool[-8:]) ^ random.getrandbits(1) for _ in range(outputs)])


networks = st.builds(
    random_network,
    st.integers(0, 1 << 30),
    st.integers(1, 8),
    st.integers(0, 40),
    st.integers(1, 4),
    st.integers(0, 2),
)
