"""Scales of drawings, and the bar that proves a print."""

from dataclasses import dataclass

# ISO 5455, from memory: enlargements, full size and reductions, each with its multiples of ten.
_STEPS = ((50, 1), (20, 1), (10, 1), (5, 1), (2, 1), (1, 1), (1, 2), (1, 5))
_TENTHS = tuple((1, below * tens) for tens in (10, 100) for below in (1, 2, 5))
SCALES = _STEPS + _TENTHS
_BAR_STEPS = (5, 4, 2, 1)
_MOST_TENS, _LEAST_TENS = 4, -4


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """So many millimetres on paper for so many in fact."""

    on_paper: int
    in_fact: int

    @property
    def told(self) -> str:
        """As it is written: "1:2"."""
        return f"{self.on_paper}:{self.in_fact}"

    def paper_mm(self, real_mm: float) -> float:
        """How long a real length is on paper."""
        return real_mm * self.on_paper / self.in_fact


def scale_for(real_mm: float, room_mm: float) -> Scale:
    """The largest scale at which a length fits: 1:1 where twice the size has no room, 2:1 and more for small things.

    Args:
        real_mm: The length to be drawn.
        room_mm: What there is room for on paper.
    """
    fitting = [Scale(on_paper=top, in_fact=under) for top, under in SCALES if real_mm * top / under <= room_mm]
    return fitting[0] if fitting else Scale(on_paper=1, in_fact=SCALES[-1][1])


def bar_mm(scale: Scale, room_mm: float) -> float:
    """The real length of the longest bar that fits: 1, 2, 4 or 5, with noughts."""
    for tens in range(_MOST_TENS, _LEAST_TENS, -1):
        for step in _BAR_STEPS:
            real_mm = step * 10.0**tens
            if scale.paper_mm(real_mm) <= room_mm:
                return real_mm
    return 10.0**_LEAST_TENS
