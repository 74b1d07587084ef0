"""A planner that computes nothing, and what it lays out.

It imports no more than it needs: children of workers begin with it, again and again, and whoever wants the web
besides takes it from `fakes`.
"""

import json
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from layout.check.finding import Code, Finding, Level, Place
from layout.errors import MidiReadError

TUNE = b"MThd a tune"
BROKEN_TUNE = b"not a tune"
THIN_WEB = Finding(
    code=Code.WEB_TOO_THIN,
    level=Level.ERROR,
    message="the web between track 3 and track 4 is 0.31 mm, below 0.5 mm",
    measured=0.31,
    limit=0.5,
    unit="mm",
    at=Place(tracks=(3, 4), angle_deg=12.5),
    remedy="leave out note 7",
)
NEAR_RIM = Finding(
    code=Code.WEB_TO_RIM,
    level=Level.WARNING,
    message="the web to the rim is 0.52 mm, near 0.5 mm",
    measured=0.52,
    limit=0.5,
    unit="mm",
    at=Place(radius_mm=110.0),
    remedy="cut a trial piece",
)


# What a layout for a laser has.
LASER_FILES = [
    *("disc.dxf", "record.dxf", "disc.svg", "hits.csv"),
    *("work-sheet.pdf", "layout.json", "report.json", "making.json"),
]

# What every layout's links have besides: made of it when it is asked for.
HEARING_FILES = ["hearing.wav", "hearing.mid"]

ALL_KEPT = {
    "note_count": 2,
    "kept_count": 2,
    "asked_weight": 2400,
    "kept_weight": 2400,
    "octave_count": 0,
    "nudged_count": 0,
    "largest_nudge_ms": 0.0,
    "mean_nudge_ms": 0.0,
    "covered_count": 0,
    "left_out": {},
}
NOTHING_ASKED = ALL_KEPT | {"note_count": 0, "kept_count": 0, "asked_weight": 0, "kept_weight": 0}
ONE_LOST = ALL_KEPT | {
    "asked_weight": 2000,
    "kept_weight": 1000,
    "kept_count": 1,
    "left_out": {"no-such-pitch": 1},
}
# What report.json holds of a tune of five notes: three are kept, one nudged, one is left out, one is outside.
REPORT: dict[str, Any] = {
    "worth": {"kept": 3400, "bound": 4000, "proved": False, "stopped": None},
    "projection_count": 2,
    "extra_pluck_count": 0,
    "total": ONE_LOST
    | {
        "note_count": 4,
        "kept_count": 3,
        "asked_weight": 4400,
        "kept_weight": 3400,
        "nudged_count": 1,
        "largest_nudge_ms": 5.0,
        "mean_nudge_ms": 5.0,
        "covered_count": 1,
    },
    "highest": ONE_LOST,
    "lowest": ALL_KEPT | {"nudged_count": 1, "largest_nudge_ms": 5.0, "mean_nudge_ms": 5.0, "covered_count": 1},
    "inner": NOTHING_ASKED,
    "melody": None,
    "not_asked": {"outside-passage": 1},
    "worst_bars": [
        {"bar": 2, "start_s": 1.5, "note_count": 3, "lost_count": 1, "asked_weight": 3000, "lost_weight": 1000}
    ],
    "tried": [],
    "load": None,
    "no_load_because": "nothing is lifted",
    "drive": {
        "start": None,
        "torque": None,
        "winding": None,
        "revolution": {"stated_s": 66.0, "by_brake_and_train_s": None},
        "clearing_turn": {"track_count": 0},
        "not_stated": [],
    },
    "net_section": None,
    "depth": None,
    "tracks": [],
}

# What making.json holds of a disc with two projections, its price not to be told.
MAKING: dict[str, Any] = {
    "format": "discwright-making/1",
    "cut_length_mm": 1250.0,
    "pierce_count": 4,
    "hit_count": 0,
    "hit_force_n": None,
    "stripping_force_n": None,
    "blank_mass_kg": 0.1734,
    "time_s": 65.4,
    "currency": None,
    "price_lines": [],
    "total": None,
    "not_stated": ["cutter.rates"],
    "not_counted": [],
}


@dataclass
class FakeLayout:
    """What the fake planner lays out."""

    title: str
    fingerprint: str
    record: dict[str, Any]
    good_to_cut: bool
    disc_number: int = 1
    disc_count: int = 1
    score: None = None
    stopped: str | None = None


@dataclass
class FakeReading:
    """A drawing that the fake planner has checked."""

    disc: Any
    plucks: Any
    findings: tuple[Finding, ...]
    good_to_cut: bool


@dataclass
class FakeDisc:
    """Three projections: two on track 1, one on track 2."""

    cutter: Any
    track_index: Any = field(default_factory=lambda: np.array([1, 0, 0]))
    radius_mm: Any = field(default_factory=lambda: np.array([40.0, 36.0, 36.0]))
    edge_angle_rad: Any = field(default_factory=lambda: np.array([0.1, 0.2, np.pi]))


@dataclass
class FakePlucks:
    """When the projections of FakeDisc sound."""

    track_index: Any = field(default_factory=lambda: np.array([1, 0, 0]))
    sounds_s: Any = field(default_factory=lambda: np.array([2.5, 0.25, 7.0]))


@dataclass
class FakePlanner:
    """Lays out anything that begins as a MIDI file does; remembers how often it was asked to."""

    findings: tuple[Finding, ...] = ()
    faulty_disc: int | None = None  # the disc of a set that has the findings; None: every one
    title: str = "Harvest Dance"
    needs_s: float = 0.0  # what a search takes that nothing stops
    laid_out_count: int = 0
    files_count: int = 0  # how often all files of a disc were made

    def fingerprint_of(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int = 1) -> str:
        seen = repr((tune, movement.id, cutter.id, settings, number))
        return f"{sum((place + 1) * ord(letter) for place, letter in enumerate(seen)):016x}"

    def lay_out_discs(
        self, tune: bytes, movement: Any, cutter: Any, settings: Any, clock: Any = None, *, most_s: float | None = None
    ) -> tuple[FakeLayout, ...]:
        self.laid_out_count += 1
        limits_s = [limit_s for limit_s in (settings.time_limit_s, most_s) if limit_s is not None]
        stopped = "time" if self.needs_s > min(limits_s, default=self.needs_s) else None
        assert clock is None or clock() <= clock()
        if not tune.startswith(b"MThd"):
            raise MidiReadError(byte_offset=0, found="'not '", expected="the header chunk", remedy="export it again")
        return tuple(
            replace(self._laid_out(tune, movement, cutter, settings, number), stopped=stopped)
            for number in range(1, settings.discs + 1)
        )

    def _laid_out(self, tune: bytes, movement: Any, cutter: Any, settings: Any, number: int) -> FakeLayout:
        findings = self.findings if self.faulty_disc in {None, number} else ()
        good = all(finding.level is not Level.ERROR for finding in findings)
        record = {
            "good_to_cut": good,
            "disc": {"number": number, "of": settings.discs},
            "movement": {"id": movement.id, "revision": movement.revision},
            "cutter": {"id": cutter.id},
            "drawn_from": cutter.drawn_from,
            "read": {"warnings": ["track 2 has no end"]},
            "transposed_semitones": 3,
            "speed_factor": 1.0,
            "from_s": 0.5,
            "projections": [{"notes": [0, 2]}, {"notes": [3]}],
            "left_out": [{"note": 1, "reason": "no-such-pitch"}],
            "findings": [
                {"code": f.code, "level": f.level, "message": f.message, "remedy": f.remedy} for f in findings
            ],
        }
        fingerprint = self.fingerprint_of(tune, movement, cutter, settings, number)
        title = settings.title or self.title
        return FakeLayout(title, fingerprint, record, good, disc_number=number, disc_count=settings.discs)

    def files_of(self, laid_out: FakeLayout, *, not_good: str | None = None) -> dict[str, bytes]:
        mark = "" if laid_out.good_to_cut or not_good is None else f" NOT GOOD TO CUT: {not_good}"
        names = ["disc.dxf", "record.dxf", "disc.svg", "hits.csv", "work-sheet.pdf"]
        if not laid_out.good_to_cut and not_good is None:
            names = ["record.dxf", "disc.svg", "work-sheet.pdf"]
        part = "" if laid_out.disc_count == 1 else f" {laid_out.disc_number}/{laid_out.disc_count}"
        self.files_count += 1
        files = {name: f"{name} of {laid_out.title}{part}{mark}".encode() for name in names}
        return {**files, **self.told_of(laid_out, not_good=not_good), "making.json": json.dumps(MAKING).encode()}

    def told_of(self, laid_out: FakeLayout, *, not_good: str | None = None) -> dict[str, bytes]:
        record = laid_out.record | {"despite_findings": None if laid_out.good_to_cut else not_good}
        report = REPORT | {"worth": REPORT["worth"] | {"stopped": laid_out.stopped}}
        told = {"layout.json": record, "report.json": report}
        return {name: json.dumps(content).encode() for name, content in told.items()}

    def check_drawing(self, dxf: bytes, movement: Any, cutter: Any) -> FakeReading:
        good = all(finding.level is not Level.ERROR for finding in self.findings)
        return FakeReading(FakeDisc(cutter), FakePlucks(), self.findings, good)
