"""The state of a circuit as a sum over paths, exactly (Amy, QPL 2018), with Booleans from a graph.

The state is the sum, over all values of the path variables y, of (-1)^signs omega^phases |values>, omega =
exp(i pi/4), with a factor that is the same for every start. A Hadamard brings a new y in; a measurement turns
one into an outcome, which is summed over no longer; `eliminate` sums one away.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from revsynth.verification.lifting.local import Slope
from revsynth.verification.lifting.model import NO_PATHS, NotClosedError, Paths, Value
from revsynth.verification.lifting.parities import FALSE, TRUE, Literal, Parities

Phases = dict[int, int]
"""Eighths of a turn by node."""

CLEAR = Value(FALSE)


class PathSum:
    """The state after some operations.

    literal, paths: by qubit, the value being literal XOR the XOR of the paths. signs: by set of path
    variables, the literal that gives a sign where all of them are 1; phases: by set, eighths of a turn times
    (node XOR the XOR of the set); `plain` are those of the empty set. The sign without path variables is the
    XOR of `sign_nodes` and `sign_flip`. sixteenths counts the constant phase in pi/8.
    """

    def __init__(self, parities: Parities, start: Sequence[Literal], bits: int) -> None:
        self.parities = parities
        self.literal: list[Literal] = list(start)
        self.paths: list[Paths] = [NO_PATHS] * len(start)
        self.bits: list[Value] = [CLEAR] * bits
        self.plain: Phases = {}
        self.signs: dict[Paths, Literal] = {}
        self.phases: dict[Paths, Phases] = {}
        self.sign_nodes: dict[int, None] = {}
        self.sign_flip = 0
        self.sixteenths = 0
        self.radians = 0.0
        self.count = 0
        self.holders: list[int] = []
        self.single: list[Paths] = []
        self.measured = bytearray()
        self.outcome_atoms: dict[int, Literal] = {}
        self.revealed: list[tuple[int, Literal]] = []
        self._open: dict[int, None] = {}
        self._linked: dict[int, dict[Paths, None]] = {}

    def value(self, qubit: int) -> Value:
        """The value of a qubit."""
        return Value(self.literal[qubit], self.paths[qubit])

    def new_path(self) -> int:
        """A path variable that occurs nowhere."""
        number = self.count
        self.count += 1
        self.single.append(frozenset((number,)))
        self.holders.append(0)
        self.measured.append(0)
        self._open[number] = None
        return number

    def change(self, qubit: int, paths: Paths) -> None:
        """XOR path variables to the value of a qubit."""
        before = self.paths[qubit]
        for path in paths:
            self.holders[path] += -1 if path in before else 1
        self.paths[qubit] = before ^ paths

    def flip(self, qubit: int, factors: Sequence[Value]) -> None:
        """XOR the product of the factors to a qubit. Raises NotClosedError where it is no sum of paths."""
        if len(factors) == 1:
            literal, paths = factors[0]
            self.literal[qubit] = self.parities.xor(self.literal[qubit], literal)
            if paths:
                self.change(qubit, paths)
            return
        total, loose = self.literal[qubit], NO_PATHS
        for paths, literal in self._product(factors).items():
            if len(paths) == 1 and literal == TRUE:
                loose = loose ^ paths
            elif paths:
                atoms = map(self._outcome_atom, sorted(paths))
                total = self.parities.xor(total, self.parities.all_of((literal, *atoms)))
            else:
                total = self.parities.xor(total, literal)
        self.literal[qubit] = total
        self.change(qubit, loose)

    def _outcome_atom(self, path: int) -> Literal:
        """An outcome as a free variable of the graph, for ANDs that read it."""
        if not self.measured[path]:
            raise NotClosedError("a product reads a qubit in superposition")
        if path not in self.outcome_atoms:
            self.outcome_atoms[path] = self.parities.free()
        return self.outcome_atoms[path]

    def as_literal(self, value: Value) -> Literal:
        """A value whose path variables are outcomes, as one literal."""
        literal, paths = value
        return self.parities.parity((literal, *map(self._outcome_atom, sorted(paths))))

    def _product(self, factors: Sequence[Value]) -> dict[Paths, Literal]:
        """The product of values as a XOR of (product of path variables) times literal."""
        parities = self.parities
        plain = parities.all_of(literal for literal, paths in factors if not paths)
        found = {} if plain == FALSE else {NO_PATHS: plain}
        for literal, paths in factors:
            if not paths:
                continue
            after: dict[Paths, Literal] = {}
            for key, coefficient in found.items():
                terms = [(key, parities.and_(coefficient, literal))]
                terms += [(key | {path}, coefficient) for path in sorted(paths)]
                for place, term in terms:
                    after[place] = parities.xor(after.get(place, FALSE), term)
            found = {place: term for place, term in after.items() if term != FALSE}
        return found

    def negate(self, factors: Sequence[Value]) -> None:
        """The sign (-1) where the product of the factors is 1."""
        for paths, literal in self._product(factors).items():
            self.add_sign(paths, literal)

    def add_sign(self, paths: Paths, literal: Literal) -> None:
        """The sign (-1) where all the paths and the literal are 1."""
        if not paths:
            self.sign_flip ^= literal & 1
            node = literal >> 1
            if node and node in self.sign_nodes:
                del self.sign_nodes[node]
            elif node:
                self.sign_nodes[node] = None
            return
        total = self.parities.xor(self.signs.get(paths, FALSE), literal)
        if total == FALSE:
            self.signs.pop(paths, None)
        else:
            self.signs[paths] = total
            if len(paths) > 1:
                self._link(paths)

    def _link(self, paths: Paths) -> None:
        for path in paths:
            self._linked.setdefault(path, {})[paths] = None

    def turn(self, value: Value, eighths: int) -> None:
        """The phase omega**eighths where the value is 1."""
        literal, paths = value
        if literal & 1:
            self.sixteenths += 2 * eighths
            eighths = -eighths
        node = literal >> 1
        if not paths:
            if node:
                self._add_phase(self.plain, paths, node, eighths)
            return
        phases = self.phases.get(paths)
        if phases is None:
            phases = self.phases[paths] = {}
            if len(paths) > 1:
                self._link(paths)
        self._add_phase(phases, paths, node, eighths)

    def _add_phase(self, phases: Phases, paths: Paths, node: int, eighths: int) -> None:
        """Half turns are linear: they become signs."""
        total = (phases.get(node, 0) + eighths) & 7
        if total == 4:
            self.add_sign(NO_PATHS, 2 * node)
            for path in paths:
                self.add_sign(self.single[path], TRUE)
            total = 0
        if total:
            phases[node] = total
        else:
            phases.pop(node, None)

    def turn_product(self, factors: Sequence[Value], eighths: int) -> None:
        """The phase omega**eighths where the product of the factors is 1."""
        eighths &= 7
        if not factors:
            self.sixteenths += 2 * eighths
        elif eighths == 4:
            self.negate(factors)
        elif len(factors) == 1:
            self.turn(factors[0], eighths)
        elif not any(paths for _, paths in factors):
            self.turn(Value(self.parities.all_of(literal for literal, _ in factors)), eighths)
        elif len(factors) == 2 and eighths & 1 == 0:
            one, other = factors
            both = Value(self.parities.xor(one.literal, other.literal), one.paths ^ other.paths)
            self.turn(one, eighths >> 1)
            self.turn(other, eighths >> 1)
            self.turn(both, -(eighths >> 1))
        else:
            raise NotClosedError("a controlled phase reads a qubit in superposition")

    def hadamard(self, qubit: int) -> None:
        """H: a new path variable, and then those that only this qubit held are summed away if possible."""
        paths = self.paths[qubit]
        if len(paths) == 1 and self._sum_at_once(qubit, *paths):
            return
        literal = self.literal[qubit]
        new = self.new_path()
        single = self.single[new]
        if literal:
            self.signs[single] = literal
        for path in paths:
            self.add_sign(single | {path}, TRUE)
            self.holders[path] -= 1
        self.literal[qubit] = FALSE
        self.paths[qubit] = single
        self.holders[new] = 1
        for path in paths:
            self.eliminate(path, qubit)

    def _sum_at_once(self, qubit: int, path: int) -> bool:
        """The usual case of `eliminate`, without writing the new variable z down: z = Q.

        With the value y ^ s of the qubit, z has the sign z (y ^ s), so y sums to z = Q, whose sign is Q s.
        """
        if self.holders[path] != 1 or self.measured[path] or self._linked.get(path):
            return False
        single = self.single[path]
        phases = self.phases.get(single)
        total = self.signs.get(single, FALSE)
        slope = None
        if phases:
            slope = Slope(self.parities, phases, total)
            if slope.quotient is None or slope.constant:
                return False
            total = self.parities.xor(total, slope.quotient)
        self.signs.pop(single, None)
        self.phases.pop(single, None)
        del self._open[path]
        self.holders[path] = 0
        outer = self.literal[qubit]
        self.literal[qubit] = total
        self.paths[qubit] = NO_PATHS
        taken = slope is not None and phases is not None and self._leave(slope, phases, NO_PATHS, outer)
        if outer and not taken:
            self.add_sign(NO_PATHS, self.parities.and_(outer, total))
        return True

    def _leave(self, slope: Slope, phases: Phases, tail: Paths, outer: Literal = FALSE) -> bool:
        """The phases c s that are left without y.

        As products where Q has them at hand: then what a relative-phase gate leaves is 2 a b on the atom a b.
        Whether the sign that comes with the parity `outer` is taken in (`Slope.rest`).
        """
        rest = None if tail else slope.rest(outer)
        if rest is None:
            for node, eighths in phases.items():
                self.turn(Value(2 * node, tail), eighths)
            return False
        for literal, eighths in rest[0]:
            self.turn(Value(literal), eighths)
        for one, other in slope.products:
            self._take_apart(self.parities.xor(one, other) >> 1)
        return rest[1]

    def _take_apart(self, node: int) -> None:
        """With a b at hand, a phase on a ^ b becomes one on a, b and, doubled, the other way, on a b."""
        eighths = self.plain.pop(node, 0)
        known = self.parities.third.get(node)
        if eighths and known:
            left, right, product = known
            self.turn(Value(2 * left), eighths)
            self.turn(Value(2 * right), eighths)
            self.turn(Value(product), -2 * eighths)
        elif eighths:
            self.plain[node] = eighths

    def eliminate(self, path: int, hint: int = -1) -> bool:
        """Sum a path variable away. False, and nothing changed, where no rule applies.

        Its phases and signs must be y (constant + 4 W) with W a literal XOR path variables. HH: constant 0,
        and W holds a variable z of no other product: z is replaced by W ^ z. Omega: constant 2.
        """
        if self.holders[path] or self.measured[path]:
            return False
        single = self.single[path]
        sets = self._linked.get(path, {})
        sign_sets = [paths for paths in sets if paths in self.signs]
        if any(len(paths) != 2 or self.signs[paths] != TRUE for paths in sign_sets):
            return False
        groups = [paths for paths in (single, *sets) if self.phases.get(paths)]
        literal = self.signs.get(single, FALSE)
        others = NO_PATHS.union(*sign_sets) - single
        slope = None
        tail = NO_PATHS
        constant = 0
        if groups:
            if len(groups) > 1:
                return False
            slope = Slope(self.parities, self.phases[groups[0]], literal)
            tail = groups[0] - single
            if slope.quotient is None or slope.constant & 1:
                return False
            if tail:
                # A common parity that holds path variables may stand alone, not in products.
                shape = slope.local.shape
                if shape is None or not slope.local.first or slope.touches_first():
                    return False
                if 1 in shape.quotient:
                    others ^= tail
            constant = slope.constant
            literal = self.parities.xor(literal, slope.quotient)
        target = -1
        if constant == 0:
            target = max((z for z in others if not self.measured[z]), default=-1)
            if target < 0 and (literal, others) != CLEAR:
                return False
        self._forget(path, sign_sets)
        if slope:
            phases = self.phases.pop(groups[0])
            self._leave(slope, phases, tail)
        if constant:
            self.sixteenths += 2
            self.turn(Value(literal, others), 6)
        elif target >= 0:
            self.substitute(target, Value(literal, others - {target}), hint)
        return True

    def _forget(self, path: int, sign_sets: Iterable[Paths]) -> None:
        self.signs.pop(self.single[path], None)
        for paths in sign_sets:
            del self.signs[paths]
            for other in paths:
                if other != path:
                    self._linked[other].pop(paths, None)
        self._linked.pop(path, None)
        self._open.pop(path, None)

    def substitute(self, path: int, value: Value, hint: int = -1) -> None:
        """Replace a path variable by a value everywhere; it is gone afterwards."""
        parities = self.parities
        single = self.single[path]
        swap = single ^ value.paths
        qubits: Iterable[int] = range(len(self.paths))
        if hint >= 0 and self.holders[path] == 1 and path in self.paths[hint]:
            qubits = (hint,)
        for qubit in qubits if self.holders[path] else ():
            if path in self.paths[qubit]:
                self.literal[qubit] = parities.xor(self.literal[qubit], value.literal)
                self.change(qubit, swap)
        sets = [single, *self._linked.pop(path, ())]
        signs = [(paths, self.signs.pop(paths)) for paths in sets if paths in self.signs]
        phases = [(paths, self.phases.pop(paths)) for paths in sets if paths in self.phases]
        for paths, sign in signs:
            rest = paths - single
            self.add_sign(rest, parities.and_(sign, value.literal))
            for other in value.paths:
                self.add_sign(rest | {other}, sign)
        for paths, group in phases:
            for node, eighths in group.items():
                self.turn(Value(parities.xor(2 * node, value.literal), paths ^ swap), eighths)
        self._open.pop(path, None)

    def settle(self) -> bool:
        """Sum away what can be; whether anything could."""
        any_gone = False
        again = True
        while again:
            again = False
            for path in list(self._open):
                if path in self._open and self.eliminate(path):
                    again = any_gone = True
        return any_gone

    def unmeasured(self) -> int:
        """How many path variables are still summed over."""
        return len(self._open)

    def settle_outcomes(self) -> None:
        """Phases with outcomes become signs that outcomes give, constants that they give left out.

        Raises NotClosedError for phases that are not shown to be such.
        """
        for paths in sorted(self.phases, key=sorted):
            phases = self.phases.pop(paths)
            if not phases:
                continue
            if len(paths) > 1 and list(phases) == [0]:
                continue
            slope = Slope(self.parities, phases, self.signs.get(paths, FALSE))
            if len(paths) > 1 or slope.quotient is None:
                raise NotClosedError("phases of measured qubits are left that are not shown to be signs")
            self.add_sign(paths, slope.quotient)
            self._leave(slope, phases, NO_PATHS)

    def measure(self, qubit: int, operation: int) -> Value:
        """Measure a qubit: its value, which from now on is that of a classical bit."""
        literal, paths = self.literal[qubit], self.paths[qubit]
        free = [path for path in paths if not self.measured[path]]
        if not free:
            if literal > TRUE:
                self.revealed.append((operation, literal))
            return Value(literal, paths)
        path = max(free)
        if len(paths) == 1 and literal == FALSE:
            outcome = path
        else:
            # y = outcome ^ the rest of the value
            outcome = self.new_path()
            self.substitute(path, Value(literal, (paths - {path}) | {outcome}))
        self.measured[outcome] = 1
        del self._open[outcome]
        return self.value(qubit)

    def reset(self, qubit: int, operation: int) -> None:
        """Measure, forget the outcome, and set to 0."""
        self.measure(qubit, operation)
        self.change(qubit, self.paths[qubit])
        self.literal[qubit] = FALSE
