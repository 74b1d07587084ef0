"""A press with a rotary table and a radial slide that runs a program without metal, and notes its strikes.

Written from the words of ISO 6983-1 (program and address formats; the standard's own text from memory) and from
what a shop's press says of its strike word, not from the writer:

- a program stands between two lines of %; what stands before the first is no part of it;
- a block is one line: words of a letter and a number, N first; what is in brackets is for people;
- G0 moves at once to the words X and C of its block, absolute after G90; G71 (ISO 6983-1) or G21 says millimetres;
- T chooses a tool, M6 takes it up; M0 stops for a person; M30 ends the program;
- the tool strikes when the block with the press's strike word is done.

Whatever else it meets, it stops with an alarm.
"""

import re
from dataclasses import dataclass, field

_COMMENT = re.compile(r"\([^()%:]*\)")
KNOWN = frozenset({"G0", "G21", "G71", "G90", "M0", "M6", "M30"})
_WORD = re.compile(r"([A-Z])([+-]?\d+\.?\d*|[+-]?\.\d+)")


class Alarm(Exception):
    """The press stops: the program asks for what it does not know or must not do."""


@dataclass(frozen=True)
class Strike:
    """One strike: where slide and table stood, how the table last turned there, and the tool in the ram."""

    slide_mm: float
    table_deg: float
    actual_table_deg: float
    tool: int


@dataclass
class DryPress:
    """The press. `backlash_deg` is how far the table lags behind, against the way it turned last."""

    strike_word: str
    backlash_deg: float = 0.0
    strikes: list[Strike] = field(default_factory=list)
    slide_mm: float = 0.0
    table_deg: float = 0.0
    turned: int = -1
    greatest_turn_deg: float = 0.0
    turned_deg: float = 0.0  # since the first strike, both ways counted
    slid_mm: float = 0.0  # the same
    tools_taken_up: int = 0
    stops: int = 0
    _chosen: int | None = None
    _tool: int | None = None
    _millimetres: bool = False
    _absolute: bool = False
    _ended: bool = False
    _moved: bool = False
    _last_number: int = 0

    def run(self, program: bytes) -> list[Strike]:
        text = program.decode("ascii")
        parts = re.split(r"(?m)^%$", text)
        if len(parts) != 3 or parts[2].strip():
            raise Alarm("a program stands between two lines of %")
        for line in parts[1].strip("\n").split("\n"):
            self._block(line)
        if not self._ended:
            raise Alarm("the program does not end")
        return self.strikes

    def _block(self, line: str) -> None:
        said = _COMMENT.sub("", line).strip()
        if not said:
            return
        if self._ended:
            raise Alarm("a block after the end")
        words = _WORD.findall(said)
        if "".join(letter + digits for letter, digits in words) != said.replace(" ", ""):
            raise Alarm(f"cannot read {line!r}")
        if words[0][0] != "N" or int(words[0][1]) <= self._last_number:
            raise Alarm(f"no rising N in {line!r}")
        self._last_number = int(words[0][1])
        strike = [(letter, digits) for letter, digits in _WORD.findall(self.strike_word)]
        if words[1:] == strike:
            self._strike()
            return
        self._done(words[1:], line)

    def _done(self, words: list[tuple[str, str]], line: str) -> None:
        moves = {letter: float(digits) for letter, digits in words if letter in "XC" and "." in digits}
        codes = [(letter, digits) for letter, digits in words if letter not in moves]
        for letter, digits in codes:
            if letter == "T" and digits.isdigit():
                self._chosen = int(digits)
            elif letter + digits not in KNOWN:
                raise Alarm(f"does not know {letter}{digits} in {line!r}")
        said = {letter + digits for letter, digits in codes}
        self._millimetres |= bool({"G21", "G71"} & set(said))
        self._absolute |= "G90" in said
        self.stops += "M0" in said
        self._ended |= "M30" in said
        if "M6" in said:
            if self._chosen is None:
                raise Alarm("M6 without a tool chosen")
            self._tool = self._chosen
            self.tools_taken_up += 1
        if moves or "G0" in said:
            self._move(moves, at_once="G0" in said)

    def _move(self, moves: dict[str, float], *, at_once: bool) -> None:
        if not at_once or not (self._millimetres and self._absolute):
            raise Alarm("a move without G0, millimetres and G90 before it")
        slid_mm = abs(moves.get("X", self.slide_mm) - self.slide_mm)
        self.slide_mm = moves.get("X", self.slide_mm)
        turn_deg = moves.get("C", self.table_deg) - self.table_deg
        if self._moved:  # the first move starts from wherever the table stands
            self.greatest_turn_deg = max(self.greatest_turn_deg, abs(turn_deg))
        self._moved = True
        if self.strikes:
            self.turned_deg, self.slid_mm = self.turned_deg + abs(turn_deg), self.slid_mm + slid_mm
        if turn_deg:
            self.turned = 1 if turn_deg > 0 else -1
        self.table_deg = moves.get("C", self.table_deg)

    def _strike(self) -> None:
        if self._tool is None:
            raise Alarm("a strike without a tool")
        lag_deg = self.turned * self.backlash_deg
        self.strikes.append(
            Strike(
                slide_mm=self.slide_mm,
                table_deg=self.table_deg,
                actual_table_deg=self.table_deg - lag_deg,
                tool=self._tool,
            )
        )
