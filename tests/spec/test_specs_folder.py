"""The specs that come with the project, each compared with plain Python of its story."""

from __future__ import annotations

from collections.abc import Callable
from itertools import permutations, product
from pathlib import Path

import pytest

from revsynth.logic.truth_table import count_ones, first_inputs, unpack_values
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import decode
from revsynth.spec.model import Output, Outputs, Permutation, Predicate, Spec
from revsynth.spec.read import read_spec
from revsynth.spec.understand import Understanding, understand

FOLDER = Path(__file__).parents[2] / "specs"
FILES = sorted(path.name for path in FOLDER.iterdir())
WIDE = ("sill_passage.toml",)
"""Too many input bits for a table."""


def read(name: str) -> Spec:
    return read_spec(str(FOLDER / name))


def marked_values(understanding: Understanding) -> list[dict[str, object]]:
    indices = first_inputs(understanding.function.values[0], 1 << 16)
    return [dict(decode(understanding.spec.inputs, index)) for index in indices]


@pytest.mark.parametrize("name", [name for name in FILES if name not in WIDE])
def test_each_is_understood_and_agrees_with_its_second_evaluation(name: str) -> None:
    understanding = understand(read(name))
    assert understanding.warnings == ()
    function, expectation = understanding.function, Expectation(understanding)
    every = 1 << function.inputs
    care = unpack_values(function.care, function.inputs)
    values = unpack_values(function.values, function.inputs)
    for index in range(0, every, max(every >> 10, 1)):
        bits = expectation(index)
        assert [bit is not None for bit in bits] == [bool(care[index] >> j & 1) for j in range(len(bits))]
        assert sum(bit << j for j, bit in enumerate(bits) if bit) == values[index]


def test_they_cover_every_section_and_every_alternative() -> None:
    specs = [read(name) for name in FILES]
    used: set[str] = set()
    for spec in specs:
        body = spec.body
        alternatives = {
            Predicate: ("where", "formula", "table", "clauses", "cover"),
            Outputs: ("cover",),
            Permutation: ("values", "map", "steps"),
        }[type(body)]
        used |= {f"{spec.kind} {key}" for key in alternatives if getattr(body, key) is not None}
        if isinstance(body, Outputs):
            used |= {f"output {key}" for word in body.words for key in set_keys(word)}
        used |= {f"{'array' if word.count else 'word'} {word.signed}" for word in spec.inputs}
        used |= {key for key in ("domain", "title", "constants", "labels") if getattr(spec, key)}
    assert used >= {
        "predicate where", "predicate formula", "predicate table", "predicate clauses", "outputs cover",
        "permutation values", "permutation map", "permutation steps", "output value", "output table",
        "output bits",
        "output signed",
        "array False", "word True", "domain", "title", "constants", "labels",
    }  # fmt: skip
    assert len(FILES) >= 8
    assert sorted(spec.input_bits for spec in specs)[-2:] == [16, 43]


def set_keys(word: Output) -> list[str]:
    return [key for key in ("value", "table", "bits", "signed") if getattr(word, key) not in (None, False)]


def test_beacons() -> None:
    found = [value["channel"] for value in marked_values(understand(read("beacons.toml")))]
    wanted = [[0, p, q, r] for r, q, p in product(range(3), repeat=3) if p != q and p and q and q != r]
    assert sorted(found) == sorted(wanted)
    assert len(found) == 4


def test_watch_rota() -> None:
    found = [value["keeper"] for value in marked_values(understand(read("watch_rota.toml")))]
    wanted = [list(p) for p in permutations(range(4)) if p[3] == 3 and abs(p.index(0) - p.index(1)) == 1]
    assert sorted(found) == sorted(wanted)


def test_range_circle() -> None:
    found = {(value["x"], value["y"]) for value in marked_values(understand(read("range_circle.toml")))}
    triples = [(0, 65), (16, 63), (25, 60), (33, 56), (39, 52)]
    assert found == {pair for x, y in triples for pair in ((x, y), (y, x))}


def test_tide_gate() -> None:
    understanding = understand(read("tide_gate.toml"))
    found = [(value["tide"], value["draught"]) for value in marked_values(understanding)]
    assert sorted(found) == sorted(
        (tide, draught) for tide in range(-8, 8) for draught in range(1, 8) if tide + 2 >= draught + 1
    )
    assert count_ones(understanding.function.domain) == 16 * 7


def test_lamp_alarm() -> None:
    understanding = understand(read("lamp_alarm.toml"))
    found = {first["out"][0] + first["out"][1] + first["out"][2] for first in marked_values(understanding)}
    assert found == {0, 1, 2, 3}
    for value in marked_values(understanding):
        out, lens = value["out"], value["lens"]
        assert value["mute"] == 0
        assert sum(out) >= 2 or (value["dark"] and lens in (0, 3))
    assert understanding.function.marked == 32 + 8


def test_fog_signal() -> None:
    understanding = understand(read("fog_signal.toml"))
    assert [value["reading"] for value in marked_values(understanding)] == [0, 1, 2, 3, 4, 6, 8]
    assert understanding.function.free == 3


def test_locker_sums() -> None:
    understanding = understand(read("locker_sums.toml"))
    assert [(word.name, word.bits, word.signed) for word in understanding.outputs] == [
        ("now", 5, False), ("room", 5, True), ("tag", 4, False), ("over", 1, False),
    ]  # fmt: skip
    table = unpack_values(understanding.function.values, 8)
    for held, change in product(range(16), range(-8, 8)):
        now = held + change
        packed = (now % 32) | ((12 - now) % 32) << 5 | ((3 * held + 5 * change) % 16) << 10 | (now > 12) << 14
        assert table[held | (change % 16) << 4] == (packed if now >= 0 else 0)


def test_lamp_digits_light_the_usual_bars() -> None:
    # common practice: bars a (top), then clockwise b to f, g in the middle
    lit = ("abcdef", "bc", "abged", "abgcd", "fgbc", "afgcd", "afgedc", "abc", "abcdefg", "abcdfg")
    table = unpack_values(understand(read("lamp_digits.toml")).function.values, 4)
    for digit, names in enumerate(lit):
        assert table[digit] == sum(1 << "abcdefg".index(bar) for bar in names) | (digit % 2) << 7


def code_wheel(index: int) -> int:
    """The evening's scrambling with plain operators."""
    code, tide, spring = index & 255, (index >> 8 & 7) - (index >> 8 & 8), index >> 12
    code = (code + 3 * tide + 7) % 256
    code ^= code >> 3
    code = code * 5 % 256
    code = (code << tide % 8 | code >> 8 - tide % 8) % 256
    code = code ^ 255 if spring else code
    code = code // 16 | code % 16 * 16 if tide < 0 else code
    return index >> 8 << 8 | code


def is_true_entry(day: int, hour: int, minute: int, tide: int, passage: int, draught: int, load: int) -> bool:
    left = (day * 24 + hour) * 60 + minute
    high_water = 428 + 745 * tide
    return (
        day <= 30 and hour <= 23 and minute <= 59
        and high_water <= left <= high_water + 19
        and hour * 60 + minute + passage <= 1200
        and passage - 310 == 4 * load
        and draught - 18 == load // 3 and draught < 28
    )  # fmt: skip


def test_sill_passage() -> None:
    """The true entries are found from tide, delay and load; one changed bit makes most of them false."""
    expectation = Expectation(understand(read("sill_passage.toml")))
    widths = (5, 5, 6, 6, 10, 5, 6)
    entries = []
    for tide, delay, load in product(range(64), range(20), range(30)):
        day, left = divmod(428 + 745 * tide + delay, 1440)
        entry = (day, left // 60, left % 60, tide, 310 + 4 * load, 18 + load // 3, load)
        if day <= 30 and left + entry[4] <= 1200:
            entries.append(entry)
    assert len(entries) == 20_520
    indices = []
    for entry in entries[::100]:
        assert is_true_entry(*entry)
        indices.append(sum(value << sum(widths[:at]) for at, value in enumerate(entry)))
    for index in indices:
        assert expectation(index) == (1,)
        for other in (index ^ 1 << bit for bit in range(43)):
            values = [other >> sum(widths[:at]) & (1 << width) - 1 for at, width in enumerate(widths)]
            assert expectation(other) == (int(is_true_entry(*values)),)


IN_PLACE: dict[str, Callable[[int], int]] = {
    "dial_code.toml": lambda place: place ^ (place >> 1),
    "code_wheel.toml": code_wheel,
    "rota_shift.toml": lambda keeper: (keeper + 3) % 11,
    "locker_keys.toml": lambda key: (3, 6, 1, 4, 7, 0)[key],
    "lens_turn.toml": lambda v: (
        (v + (v >> 4 & 7) - (8 if v >> 6 & 1 else 0)) % 16
        | ((v >> 4 & 7) ^ (7 if v >> 7 else 0)) << 4
        | v & 128
    ),
}


@pytest.mark.parametrize("name", sorted(IN_PLACE))
def test_blocks_in_place(name: str) -> None:
    function = understand(read(name)).function
    table = unpack_values(function.values, function.inputs)
    fixed = first_inputs(function.care[0], 1 << function.inputs)
    assert [int(table[index]) for index in fixed] == [IN_PLACE[name](index) for index in fixed]
    assert len({int(table[index]) for index in fixed}) == len(fixed)


def test_fuse_box() -> None:
    wanted = []
    for index in range(1 << 10):
        lamp1, lamp2, lamp3, drive4, drive5, horn, heater7, heater8, charger, _ = (
            bool(index >> bit & 1) for bit in range(10)
        )
        if (
            1 <= lamp1 + lamp2 + lamp3 <= 2
            and drive4 != drive5
            and (not horn or (charger and not heater7 and not heater8))
            and not (heater7 and heater8)
            and (heater7 or heater8)
            and not (drive5 and lamp3)
            and charger
        ):
            wanted.append(index)
    assert first_inputs(understand(read("fuse_box.cnf")).function.values[0], 1 << 10) == wanted


def test_status_panel() -> None:
    understanding = understand(read("status_panel.pla"))
    function = understanding.function
    table, care = unpack_values(function.values, 4), unpack_values(function.care, 4)
    for index in range(16):
        battery, lamp, door = index & 3, index >> 2 & 1, index >> 3
        red = battery == 0 or lamp == 0
        assert bool(table[index] >> 2 & 1) == (red and bool(care[index] >> 2 & 1))
        assert bool(table[index] & 1) == (battery >= 2 and lamp == 1 and door == 0)
    assert understanding.spec.labels["v[0]"] == "battery0"
    assert understanding.spec.labels["f[2]"] == "red"
