"""Take a verified oracle, break one gate after another, and watch verification name an input each time.

Run from the repository's top folder: python examples/catch_a_fault.py
"""

import revsynth


def main() -> None:
    spec = revsynth.predicate(
        "distinct(watch[0], watch[1], watch[2]) and watch[0] < watch[2]",
        inputs={"watch": {"bits": 2, "count": 3}},
        title="Three watches by different keepers, the first keeper's number below the last's",
    )
    built = revsynth.build(spec)
    print(f"{spec.title}: {built.counts['marked']} rotas of {built.counts['domain']}")
    print(f"{built.cost['qubits']} qubits, {built.cost['t']} T, evidence {built.evidence.level}")

    lines = built.text().splitlines()
    gates = [
        number
        for number, line in enumerate(lines)
        if line.endswith(";") and not line.startswith(("OPENQASM", "include", "qubit", "bit"))
    ]
    missed = 0
    for number in gates:
        broken = "\n".join(lines[:number] + lines[number + 1 :]) + "\n"
        verdict = revsynth.verify(spec, text=broken, exact_phase=True)
        if verdict.holds:
            missed += 1
        elif number == gates[len(gates) // 2]:
            found = verdict.counterexample
            print(f"without line {number + 1}, {lines[number]!r}: {found.why} at {found.inputs}")
    print(f"{len(gates)} gates removed in turn, {len(gates) - missed} of the faults caught")


if __name__ == "__main__":
    main()
