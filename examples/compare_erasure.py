"""The same condition built for several machines: what erasing scratch by measurement and fewer qubits cost.

Run from the repository's top folder: python examples/compare_erasure.py
"""

from pathlib import Path

import revsynth

SPECS = Path(__file__).parent.parent / "specs"


def main() -> None:
    spec = revsynth.read_spec(SPECS / "beacons.toml")
    print(spec.title)
    print(f"{'erasure':<10} {'qubits allowed':>14} {'qubits':>7} {'T':>6} {'CX':>6} {'depth':>6}  evidence")
    for uncompute in ("unitary", "measured"):
        widest = revsynth.build(spec, uncompute=uncompute)
        enough = widest.cost["qubits"]
        for allowed in range(enough, spec.input_bits, -2):
            try:
                built = revsynth.build(spec, uncompute=uncompute, qubits=allowed)
            except revsynth.BudgetError as error:
                print(f"{uncompute:<10} {allowed:>14}  {error}")
                break
            cost = built.cost
            print(
                f"{uncompute:<10} {allowed:>14} {cost['qubits']:>7} {cost['t']:>6} {cost['cx']:>6} "
                f"{cost['depth']:>6}  {built.evidence.level}, {built.evidence.inputs_checked} inputs"
            )


if __name__ == "__main__":
    main()
