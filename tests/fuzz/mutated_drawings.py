"""DXF files changed where they are DXF: pairs of a group code and a value, and whole entities."""

import math
import random
from collections.abc import Callable

_CODES = (
    *(0, 2, 5, 8, 10, 11, 20, 21, 30, 40, 42, 43, 50, 51, 62, 66, 70, 90, 100),
    *(210, 220, 230, 330, 999, 1000, 1071, -1),
)
_KINDS = (
    *("LINE", "ARC", "CIRCLE", "POINT", "LWPOLYLINE", "POLYLINE", "VERTEX", "SEQEND", "SPLINE", "INSERT", "TEXT", "X"),
    *("SECTION", "ENDSEC", "EOF", "ENTITIES", "HEADER", "BLOCK", "LAYER", "HATCH", "DIMENSION", "MTEXT"),
)
_NUMBERS = (
    *("0", "1", "-1", "4", "0.0", "1e-12", "1e300", "-1e300", "nan", "inf", "1e6", "180", "360", "20000"),
    "9" * 40,
)
_TEXTS = (
    *("RIM", "HOLES", "SLITS", "SLOTS", "HITS", "MARKS", "FOLDS", "TRACKS", "0"),
    *("", "*", "\udcff", "{ACAD", "FFFFFFFF"),
)
_WILD = (*_NUMBERS, *_TEXTS, *_KINDS)
_MOST_AGAIN = 400
_SHORT = 20  # pairs of an entity that is drawn so often

Pair = tuple[str, str]


def mutated_drawing(dxf: bytes, dice: random.Random) -> bytes:
    """The drawing with one to eight changes; what is no drawing is changed as bytes."""
    pairs = _pairs(dxf)
    if not pairs or dice.random() < 0.05:
        at = dice.randrange(len(dxf) + 1)
        return dxf[:at] + bytes([dice.randrange(256)]) * dice.randrange(3) + dxf[at + dice.randrange(3) :]
    for _ in range(dice.choice((1, 1, 2, 8))):
        if pairs:
            # The entities stand near the end; half of the changes are made there.
            at = dice.randrange(len(pairs) // 2 if dice.random() < 0.5 else 0, len(pairs))
            pairs = dice.choice(CHANGES)(pairs, at, dice)
    return "".join(f"{code}\n{value}\n" for code, value in pairs).encode("utf-8", "surrogateescape")


def _pairs(dxf: bytes) -> list[Pair]:
    lines = dxf.decode("utf-8", "surrogateescape").splitlines()
    return list(zip(lines[::2], lines[1::2], strict=False))


def _pair_away(pairs: list[Pair], at: int, _: random.Random) -> list[Pair]:
    return pairs[:at] + pairs[at + 1 :]


def _pair_again(pairs: list[Pair], at: int, _: random.Random) -> list[Pair]:
    return pairs[: at + 1] + pairs[at:]


def _pair_put_in(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    return [*pairs[:at], (str(dice.choice(_CODES)), dice.choice(_WILD)), *pairs[at:]]


def _value_changed(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    code, value = pairs[at]
    return [*pairs[:at], (code, _another(value, dice)), *pairs[at + 1 :]]


def _code_changed(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    return [*pairs[:at], (str(dice.choice(_CODES)), pairs[at][1]), *pairs[at + 1 :]]


def _entity_away(pairs: list[Pair], at: int, _: random.Random) -> list[Pair]:
    begin, end = _entity(pairs, at)
    return pairs[:begin] + pairs[end:]


def _entity_again(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    begin, end = _entity(pairs, at)
    often = _MOST_AGAIN if end - begin < _SHORT and dice.random() < 0.1 else 2
    return pairs[:begin] + pairs[begin:end] * often + pairs[end:]


def _entity_moved(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    begin, end = _entity(pairs, at)
    rest = pairs[:begin] + pairs[end:]
    to = dice.randrange(len(rest) + 1)
    return rest[:to] + pairs[begin:end] + rest[to:]


def _entity_renamed(pairs: list[Pair], at: int, dice: random.Random) -> list[Pair]:
    begin, _ = _entity(pairs, at)
    return [*pairs[:begin], ("0", dice.choice(_KINDS)), *pairs[begin + 1 :]]


def _entity(pairs: list[Pair], at: int) -> tuple[int, int]:
    """From the pair with the code 0 at or before a place to the next one."""
    begin = next((place for place in range(at, -1, -1) if pairs[place][0].strip() == "0"), 0)
    end = next((place for place in range(at + 1, len(pairs)) if pairs[place][0].strip() == "0"), len(pairs))
    return begin, end


def _another(value: str, dice: random.Random) -> str:
    """A number near by or far off; anything in place of a text."""
    try:
        number = float(value)
    except ValueError:
        return dice.choice(_WILD)
    if not math.isfinite(number):
        return dice.choice(_NUMBERS)
    near = (
        str(number + dice.uniform(-1, 1)),
        str(-number),
        str(number * 1.001),
        str(number * 10),
        str(int(number) ^ 1),
    )
    return dice.choice((*near, *_NUMBERS))


CHANGES: tuple[Callable[[list[Pair], int, random.Random], list[Pair]], ...] = (
    _pair_away,
    _pair_again,
    _pair_put_in,
    _value_changed,
    _value_changed,
    _code_changed,
    _entity_away,
    _entity_again,
    _entity_moved,
    _entity_renamed,
)
