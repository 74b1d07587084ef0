from typing import Any

import pytest

from service.commands.report_lines import WIDTH, kept_lines, percent, report_lines, worth_told
from tests.service.fakes import NOTHING_ASKED, ONE_LOST, REPORT

PLACED = {"placed_by": "position_tolerance_mm", "play_ms": None}
TRACKS = [
    {"track": 1, "radius_mm": 36.0, "together_ms": 24.04, "root_square_ms": 17.21} | PLACED,
    {"track": 2, "radius_mm": 38.62, "together_ms": 23.0, "root_square_ms": 16.5} | PLACED,
    {"track": 31, "radius_mm": 114.6, "together_ms": 9.05, "root_square_ms": 6.58} | PLACED,
]
WIDEST = {
    "note_count": 50_000,
    "kept_count": 49_000,
    "asked_weight": 345_000_000,
    "kept_weight": 344_999_999,
    "octave_count": 10_000,
    "nudged_count": 12_000,
    "largest_nudge_ms": 50.0,
    "mean_nudge_ms": 12.5,
    "covered_count": 20_000,
    "left_out": {"wheel-still-stepping": 600, "damper-not-recovered": 300, "no-such-pitch": 50, "unusable-tooth": 50},
}


def told(**changes: Any) -> list[str]:
    """Every line of the report with some fields changed."""
    report = REPORT | changes
    return [*kept_lines(report), *report_lines(report)]


@pytest.mark.parametrize(
    ("part", "whole", "text"),
    [
        (0, 0, "-"),
        (0, 7, "0.0 %"),
        (7, 7, "100.0 %"),
        (601_140, 611_807, "98.3 %"),  # 98.256
        (2, 3, "66.7 %"),
        (99_999, 100_000, "99.9 %"),  # something is missing
        (1, 100_000, "0.1 %"),  # something is there
    ],
)
def test_a_share_is_none_or_all_only_where_it_is(part: int, whole: int, text: str) -> None:
    assert percent(part, whole) == text


@pytest.mark.parametrize(
    ("worth", "words"),
    [
        (
            {"kept": 611_807, "bound": 611_807, "proved": True, "stopped": None},
            "611807, proved best: nothing searched keeps more",
        ),
        (
            {"kept": 601_140, "bound": 611_807, "proved": False, "stopped": None},
            "601140 of at most 611807 (98.3 %)",
        ),
        (
            {"kept": 601_140, "bound": 611_807, "proved": False, "stopped": "nodes"},
            "601140 of at most 611807 (98.3 %); the search ended at the most nodes it may try",
        ),
        (
            {"kept": 601_140, "bound": 611_807, "proved": False, "stopped": "time"},
            "601140 of at most 611807 (98.3 %); the search ended at its time limit",
        ),
        (
            {"kept": 601_140, "bound": 611_807, "proved": False, "stopped": "nudges"},
            "601140 of at most 611807 (98.3 %); more would be too heavy for the drive once it is nudged",
        ),
        ({"kept": 0, "bound": 0, "proved": True, "stopped": None}, "0, proved best: nothing searched keeps more"),
    ],
)
def test_the_worth_is_told_in_words(worth: dict[str, Any], words: str) -> None:
    assert worth_told(worth) == words


def test_extra_plucks_are_told_with_the_projections() -> None:
    lines = told(projection_count=9, extra_pluck_count=6)

    assert lines[0] == "  kept        3 of 4 notes asked for, as 9 projections, 6 of them extra plucks"


def test_nothing_is_said_of_notes_left_out_where_none_is() -> None:
    lines = told(total=REPORT["total"] | {"left_out": {}}, not_asked={})

    assert not [line for line in lines if line.startswith(("  left out", "  not asked"))]


def test_the_melody_has_a_row_where_it_is_told_apart() -> None:
    [row] = [line for line in told(melody=ONE_LOST) if "melody" in line]

    assert row == "  melody        2     1       50.0 %       0       0        -       -        0         1"
    assert not [line for line in told() if "melody" in line]


def test_the_worst_bars_and_the_transpositions_are_tables() -> None:
    bars = [
        {"bar": 112, "start_s": 204.5, "note_count": 12, "lost_count": 3, "asked_weight": 12_000, "lost_weight": 4000},
        {"bar": 7, "start_s": 9.0, "note_count": 3, "lost_count": 1, "asked_weight": 3000, "lost_weight": 1000},
    ]
    tried = [
        {"semitones": 3, "speed_factor": 1.0, "kept": 601_140, "bound": 601_140},
        {"semitones": -12, "speed_factor": 0.95, "kept": None, "bound": 590_000},
        {"semitones": 0, "speed_factor": 1.0, "kept": 1000, "bound": 1000},
    ]

    lines = told(worst_bars=bars, tried=tried)

    start = lines.index("  worst bar      from  notes  lost  weight lost")
    assert lines[start + 1 : start + 7] == [
        "  112        204.50 s     12     3       33.3 %",
        "  7            9.00 s      3     1       33.3 %",
        "  transposition  speed           worth",
        "  +3                 1          601140",
        "  -12             0.95  at most 590000",
        "  +0                 1            1000",
    ]


def test_no_table_stands_where_there_is_nothing_to_list() -> None:
    lines = told(worst_bars=[], tried=[], tracks=[])

    assert not [line for line in lines if line.startswith(("  worst bar", "  transposition", "  timing"))]


@pytest.mark.parametrize(
    ("limit_nmm", "share", "limit"),
    [(60.0, 0.7575, "75.8 % of the 60 N mm the drive has"), (None, None, "the movement states no limit")],
)
def test_the_load_is_told_with_its_moment_and_chord(limit_nmm: float | None, share: float | None, limit: str) -> None:
    chord = [{"track": 5, "pitch": "C4"}, {"track": 17, "pitch": "G4"}]
    load = {"peak_nmm": 45.45, "limit_nmm": limit_nmm, "share_of_limit": share, "at_s": 12.3456, "chord": chord}

    lines = told(load=load)

    start = next(place for place, line in enumerate(lines) if line.startswith("  load"))
    words = " ".join(" ".join(lines[start:]).split())
    assert words == f"load at most 45.45 N mm, {limit}, at 12.346 s: C4 (track 5), G4 (track 17)"


def told_under(label: str, **changes: Any) -> str:
    """The words under a label, "" where there is none."""
    lines = told(**changes)
    places = [place for place, line in enumerate(lines) if line.startswith(f"  {label} ")]
    if not places:
        return ""
    own = [line for line in lines[places[0] + 1 :] if line.startswith("      ")]
    return " ".join(" ".join([lines[places[0]], *own]).split()).removeprefix(f"{label} ")


def test_the_timing_is_told_of_the_innermost_and_the_outermost_track() -> None:
    assert told_under("timing", tracks=TRACKS) == (
        "at worst cut within 24.0 ms either way (17.2 ms by root of squares) on track 1 (36 mm), 9.1 ms (6.6 ms) on "
        "track 31 (114.6 mm); placed by position_tolerance_mm; the centre hole's play is not stated; report.json "
        "lists every track"
    )
    assert told_under("timing", tracks=TRACKS[:1]).startswith(
        "at worst cut within 24.0 ms either way (17.2 ms by root of squares) on track 1 (36 mm); placed by"
    )


def test_a_stated_play_and_two_ways_of_placing_are_told() -> None:
    by_class = TRACKS[0] | {"placed_by": "iso-9013-1", "play_ms": 8.0}

    words = told_under("timing", tracks=[by_class, TRACKS[2] | {"play_ms": 2.5}])

    assert "; placed by iso-9013-1 and position_tolerance_mm; report.json lists" in words


NET_SECTION = {
    "line": {"left_mm": 65.79, "share": 0.8431, "angle_deg": 286.89, "least_share": 0.4},
    "ring": {"left_mm": 204.5, "share": 0.7592, "radius_mm": 42.88, "least_share": 0.35},
}


DEPTH = {
    "depth_mm": 1.41,
    "plus_minus_mm": 0.05,
    "flatness_mm": 0.1,
    "least_mm": 1.26,
    "most_mm": 1.56,
    "flatness_limit_mm": 0.15,
    "ended_by": "tip-in-bend",
}


def test_the_depth_is_told_with_what_flatness_takes_and_where_it_ends() -> None:
    band = "1.260 to 1.560 mm at the star wheels, 1.41 mm within 0.05 mm of forming and 0.1 mm of flatness"

    assert told_under("depth", depth=DEPTH) == f"{band}; sheets serve up to 0.150 mm out of flat, then tip-in-bend"
    assert told_under("depth", depth=DEPTH | {"flatness_limit_mm": None, "ended_by": None}) == band
    failing = DEPTH | {"flatness_limit_mm": -0.129, "ended_by": "step-too-short"}
    assert told_under("depth", depth=failing) == f"{band}; not even a flat sheet serves: step-too-short"
    assert told_under("depth", depth=None) == ""


def test_the_metal_left_is_told_with_its_places_and_what_is_asked_for() -> None:
    assert told_under("metal", net_section=NET_SECTION) == (
        "least left on a line 84.3 % of at least 40 % (65.8 mm, at 286.9°), on a ring 75.9 % of at least 35 % "
        "(at 42.9 mm)"
    )


def test_a_cutter_that_asks_for_no_metal_is_said_to() -> None:
    nothing_asked = {name: part | {"least_share": None} for name, part in NET_SECTION.items()}

    assert told_under("metal", net_section=nothing_asked) == (
        "least left on a line 84.3 % (65.8 mm, at 286.9°), on a ring 75.9 % (at 42.9 mm); the cutter states no least"
    )
    assert told_under("metal", net_section=None) == ""


def test_the_largest_report_fits_the_width() -> None:
    chord = [{"track": track, "pitch": "C#4"} for track in range(1, 41)]
    load = {"peak_nmm": 1234.5, "limit_nmm": 1500.0, "share_of_limit": 0.823, "at_s": 85000.0, "chord": chord}
    voices = dict.fromkeys(("total", "highest", "lowest", "inner", "melody"), WIDEST)
    reasons = {"outside-passage": 10_000, "past-the-turn": 10_000, "ruled-out": 10_000}
    worth = {"kept": 344_999_999, "bound": 345_000_000, "proved": False, "stopped": "nodes"}

    lines = told(
        **voices,
        load=load,
        not_asked=reasons,
        worth=worth,
        extra_pluck_count=20_000,
        tracks=TRACKS,
        net_section=NET_SECTION,
        depth=DEPTH,
    )

    assert max(map(len, lines)) <= WIDTH
    assert not [line for line in lines if "-\n" in line or line.endswith("wheel-still-")]


def test_a_report_of_nothing_can_be_told() -> None:
    voices = dict.fromkeys(("total", "highest", "lowest", "inner"), NOTHING_ASKED)
    worth = {"kept": 0, "bound": 0, "proved": True, "stopped": None}

    lines = told(**voices, worth=worth, not_asked={}, worst_bars=[], projection_count=0)

    assert lines == [
        "  kept        0 of 0 notes asked for, as 0 projections",
        "  worth       0, proved best: nothing searched keeps more",
        "  voice     notes  kept  weight kept  octave  nudged  largest  mean  covered  left out",
        "  top line      0     0            -       0       0        -     -        0         0",
        "  bass          0     0            -       0       0        -     -        0         0",
        "  inner         0     0            -       0       0        -     -        0         0",
        "  total         0     0            -       0       0        -     -        0         0",
        "  load        not known: nothing is lifted",
    ]


START = {"to_speed_s": 1.0093, "to_speed_deg": 2.9876, "before_music_deg": 16.0, "at_least": False}
WINDING = {"turns": 11.0, "last_turn_slows_share": 0.01629, "upper_bound": False}


def drive_told(**changes: Any) -> str:
    """The words under the label of the drive, "" where there is none."""
    lines = told(drive=REPORT["drive"] | changes, tracks=[])
    places = [place for place, line in enumerate(lines) if line.startswith("  drive")]
    return " ".join(" ".join(lines[places[0] :]).split()).removeprefix("drive ") if places else ""


def test_the_drive_is_told_in_a_few_words() -> None:
    assert drive_told(start=START, winding=WINDING, clearing_turn={"track_count": 44}) == (
        "99 % of its speed after 1.01 s and 2.99°; music may begin at 16°; 11.00 turns a winding, the last 1.6 % "
        "slower at its end; after a change of disc let it make one turn unheard: the first note of each of 44 tracks "
        "may come early or not at all"
    )


def test_what_the_drive_leaves_aside_is_told_as_a_bound() -> None:
    words = drive_told(start=START | {"at_least": True}, winding=WINDING | {"upper_bound": True})

    assert words.startswith("99 % of its speed after at least 1.01 s and 2.99°;")
    assert words.endswith("at most 11.00 turns a winding, the last at least 1.6 % slower at its end")


def test_what_the_movement_does_not_state_of_its_drive_is_named() -> None:
    assert drive_told(not_stated=["drive", "teeth.lift_mm"]) == "not stated: drive, teeth.lift_mm"
    assert drive_told() == ""
