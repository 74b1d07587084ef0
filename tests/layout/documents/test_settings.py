import json
from collections.abc import Iterator
from typing import Any

import jsonschema
import pytest

from layout.documents import Settings, read_settings
from layout.documents.settings import MOST_DISCS, MOST_NUDGE_MS, MOST_RULINGS
from layout.documents.settings_passage import MOST_BAR
from layout.errors import DocumentError

# Every field, by its JSON pointer: the default, values at the edges of what is accepted, and what is refused with
# which message.
FROM_ONE_TO_16 = [(0, "greater than or equal to 1, got 0"), (17, "less than or equal to 16, got 17")]
FACTOR_REFUSED = [(0.0099, "greater than or equal to 0.01"), (100.01, "less than or equal to 100"), ("2", "a number")]
SHARE_REFUSED = [(-0.01, "greater than or equal to 0"), (1.01, "less than or equal to 1"), (True, "a number is needed")]
NUDGE_REFUSED = [(-0.1, "greater than or equal to 0"), (50.1, "less than or equal to 50, got 50.1"), (None, "a number")]
BAR_REFUSED = [
    (0, "greater than or equal to 1, got 0"),
    (MOST_BAR + 1, "less than or equal to 100000"),
    (1.5, "a whole number is needed"),
    (True, "a whole number is needed, got true"),
    ("3", 'a whole number is needed, got "3"'),
]
FIELDS: dict[str, tuple[Any, list[Any], list[tuple[Any, str]]]] = {
    "/format": ("discwright-settings/1", ["discwright-settings/1"], [("discwright-settings/2", "Input should be")]),
    "/title": (None, [None, "A", "A" * 80], [("", "at least 1 character"), ("A" * 81, "at most 80 characters")]),
    "/order": (
        None,
        [None, "7", "A 12/3-b_c.d", "A" * 40],
        [("", "match pattern"), ("-7", "match pattern"), ("A" * 41, "match pattern"), ("ä", "match pattern")],
    ),
    "/passage/from_s": (None, [None, 0, 86_400], [(-1, "equal to 0, got -1"), (86_401, "86400, got 86401")]),
    "/passage/to_s": (
        None,
        [None, 0.001, 86_400],
        [(0, "equal to 0.001, got 0"), ("1", "a number is needed, got '1'")],
    ),
    "/passage/from_bar": (None, [None, 1, MOST_BAR], BAR_REFUSED),
    "/passage/to_bar": (None, [None, 2, MOST_BAR], BAR_REFUSED),
    "/speed/mode": ("as-written", ["as-written", "fit", "best"], [("slow", "'fit', 'factor' or 'best', got 'slow'")]),
    "/speed/least": (0.8, [0.01, 1.25], FACTOR_REFUSED),
    "/speed/most": (1.25, [0.8, 100], FACTOR_REFUSED),
    "/transpose/mode": ("best", ["best"], [("any", "'best' or 'fixed', got 'any'")]),
    "/transpose/range": (12, [0, 48], [(-1, "equal to 0, got -1"), (49, "equal to 48, got 49"), (True, "got true")]),
    "/octave_moves": ("none", ["none", "outer", "all"], [("inner", "'none', 'outer' or 'all', got 'inner'")]),
    "/octave_fit": (0.6, [0.001, 1], [(0, "greater than 0, got 0"), (1.01, "less than or equal to 1")]),
    "/largest_nudge_ms": (20.0, [0, MOST_NUDGE_MS], NUDGE_REFUSED),
    "/largest_melody_nudge_ms": (6.0, [0, MOST_NUDGE_MS], NUDGE_REFUSED),
    "/channels/leave_out": (
        (),
        [[], [1, 16], [3, 3]],
        [([0], "/channels/leave_out/0: .*got 0"), (3, "a list is needed, got 3")],
    ),
    "/channels/keep_only": (
        (),
        [[], [1, 16]],
        [([17], "/channels/keep_only/0: .*got 17"), ([True], "/channels/keep_only/0: .*got true")],
    ),
    "/channels/lead": (None, [None, 1, 16], FROM_ONE_TO_16),
    "/sequence": (1, [1, 65_535], [(0, "equal to 1, got 0"), (65_536, "equal to 65535"), (True, "got true")]),
    "/discs": (
        1,
        [1, MOST_DISCS],
        [(0, "equal to 1, got 0"), (25, "equal to 24, got 25"), (1.5, "a whole number is needed, got 1.5")],
    ),
    "/load_limit": ("keep", ["keep", "ignore"], [("off", "'keep' or 'ignore', got 'off'")]),
    "/time_limit_s": (None, [None, 0.001, 86_400], [(0, "equal to 0.001, got 0"), (86_401, "equal to 86400")]),
    "/writing/pluck_again_s": (None, [None, 0.1, 10], [(0.09, "equal to 0.1, got 0.09"), (10.1, "equal to 10")]),
    "/writing/ornaments": ("as-any-note", ["as-any-note", "over-doubled-teeth"], [("none", "got 'none'")]),
    "/writing/chords": ("together", ["together", "bass-first"], [("spread", "got 'spread'")]),
    "/writing/two_teeth_from_velocity": (None, [None, 1, 127], [(0, "equal to 1"), (128, "equal to 127, got 128")]),
    "/writing/ringing_tooth_cost": (0.0, [0, 1], SHARE_REFUSED),
    "/writing/ringing_bass_cost": (0.0, [0, 1], SHARE_REFUSED),
}
# Fields that mean something only beside another: the pointer, what stands beside it, then as above.
BESIDE: dict[str, tuple[dict[str, Any], Any, list[Any], list[tuple[Any, str]]]] = {
    "/passage/from_beat": ({"from_bar": 1}, 1.0, [1, 1.5, 256], [(0.9, "equal to 1"), (256.5, "equal to 256")]),
    "/passage/to_beat": ({"to_bar": 2}, 1.0, [1, 1.5, 256], [(0.9, "equal to 1"), (None, "a number is needed")]),
    "/speed/factor": ({"mode": "factor"}, None, [0.01, 100], FACTOR_REFUSED),
    "/transpose/semitones": ({"mode": "fixed"}, None, [-48, 48], [(-49, "equal to -48"), (49, "to 48, got 49")]),
}


def document(pointer: str, value: Any, beside: dict[str, Any] | None = None) -> dict[str, Any]:
    """Settings with one field, and in its part the fields beside it."""
    *parts, field = pointer.strip("/").split("/")
    found = {**(beside or {}), field: value}
    return {parts[0]: found} if parts else found


def read(settings: dict[str, Any]) -> Settings:
    return read_settings(json.dumps(settings))


def value_at(settings: Settings, pointer: str) -> Any:
    found: Any = settings
    for name in pointer.strip("/").split("/"):
        found = getattr(found, name)
    return found


def every_case() -> Iterator[tuple[str, dict[str, Any], list[Any], list[tuple[Any, str]]]]:
    for pointer, (_, accepted, refused) in FIELDS.items():
        yield pointer, {}, accepted, refused
    for pointer, (beside, _, accepted, refused) in BESIDE.items():
        yield pointer, beside, accepted, refused


ACCEPTED = [(pointer, beside, value) for pointer, beside, accepted, _ in every_case() for value in accepted]
REFUSED = [(pointer, beside, *one) for pointer, beside, _, refused in every_case() for one in refused]


def test_empty_settings_are_the_defaults() -> None:
    assert read_settings("{}") == Settings()


def test_every_field_is_tried_here() -> None:
    dumped = Settings().model_dump(exclude={"rulings"})
    pointers = {
        f"/{name}/{inner}" if inner else f"/{name}"
        for name, value in dumped.items()
        for inner in (value if isinstance(value, dict) else [""])
    }

    assert pointers == set(FIELDS) | set(BESIDE)


def test_the_defaults_are_those_agreed() -> None:
    stated = {pointer: default for pointer, (default, *_) in FIELDS.items()}
    stated.update({pointer: default for pointer, (_, default, *_) in BESIDE.items()})

    assert {pointer: value_at(Settings(), pointer) for pointer in stated} == stated


@pytest.mark.parametrize(("pointer", "beside", "value"), ACCEPTED)
def test_a_value_at_the_edge_is_accepted(pointer: str, beside: dict[str, Any], value: Any) -> None:
    found = value_at(read(document(pointer, value, beside)), pointer)

    assert found == (tuple(value) if isinstance(value, list) else value)


@pytest.mark.parametrize(("pointer", "beside", "value", "message"), REFUSED)
def test_a_value_past_the_edge_is_refused_with_its_place(
    pointer: str, beside: dict[str, Any], value: Any, message: str
) -> None:
    place = "" if message.startswith("/") else rf"settings: {pointer}: .*"

    with pytest.raises(DocumentError, match=place + message):
        read(document(pointer, value, beside))


@pytest.mark.parametrize(
    ("settings", "message"),
    [
        ({"passage": {"from_s": 5, "to_s": 4}}, r"/passage: to_s \(4\) must be after from_s \(5\)"),
        ({"passage": {"from_s": 5, "from_bar": 4}}, "/passage: give from_s or from_bar, not both"),
        ({"passage": {"to_s": 5, "to_bar": 4}}, "/passage: give to_s or to_bar, not both"),
        ({"passage": {"from_beat": 2}}, r"/passage: from_beat \(2\) needs from_bar"),
        ({"passage": {"to_s": 9, "to_beat": 1.5}}, r"/passage: to_beat \(1.5\) needs to_bar"),
        (
            {"passage": {"from_bar": 9, "to_bar": 8, "to_beat": 4}},
            "bar 8, beat 4, where the passage ends, must be after bar 9, beat 1, where it begins",
        ),
        ({"passage": {"from_bar": 9, "from_beat": 2, "to_bar": 9, "to_beat": 2}}, "must be after bar 9, beat 2"),
        ({"passage": {"to_bar": 1}}, "bar 1, beat 1, where the passage ends, must be after bar 1, beat 1"),
        ({"speed": {"mode": "factor"}}, 'give factor with mode "factor", and only then'),
        ({"speed": {"mode": "best", "factor": 1}}, 'give factor with mode "factor", and only then'),
        ({"speed": {"mode": "fit", "least": 2, "most": 1}}, r"least \(2\) must not be above most \(1\)"),
        ({"transpose": {"mode": "fixed"}}, 'give semitones with mode "fixed", and only then'),
        ({"transpose": {"semitones": 2}}, 'give semitones with mode "fixed", and only then'),
        ({"channels": {"leave_out": [3, 4], "keep_only": [4]}}, "channel 4 is in leave_out and in keep_only; drop it"),
        ({"channels": {"leave_out": [3], "lead": 3}}, "the lead, channel 3, is in leave_out; drop it there"),
        ({"channels": {"keep_only": [3], "lead": 4}}, "the lead, channel 4, is not in keep_only; add it there"),
        ({"rulings": [{"note": 1, "do": "place"}]}, '/rulings/0: give track with do "place", and only then'),
        ({"rulings": [{"note": 1, "do": "leave-out", "track": 1}]}, 'give track with do "place", and only then'),
        ({"rulings": [{"note": -1, "do": "leave-out"}]}, "/rulings/0/note: .*got -1"),
        ({"rulings": [{"note": True, "do": "leave-out"}]}, "/rulings/0/note: a whole number is needed, got true"),
        ({"rulings": [{"note": 1, "do": "place", "track": 0}]}, "/rulings/0/track: .*got 0"),
        ({"rulings": [{"note": 1, "do": "drop"}]}, "/rulings/0/do: .*got 'drop'"),
        ({"rulings": [{"note": 1, "do": "leave-out"}] * (MOST_RULINGS + 1)}, "/rulings: .*at most 50000 items"),
        ({"tempo": 90}, "/tempo: no such field"),
        ({"writing": {"trills": True}}, "/writing/trills: no such field"),
    ],
)
def test_fields_that_contradict_each_other_are_refused(settings: dict[str, Any], message: str) -> None:
    with pytest.raises(DocumentError, match=message):
        read(settings)


@pytest.mark.parametrize(
    "passage",
    [
        {"from_bar": 9, "to_bar": 9, "to_beat": 1.25},
        {"from_bar": 9, "from_beat": 4.5, "to_bar": 10},
        {"from_bar": 400, "to_s": 1},  # which of the two comes first only the tune can tell
        {"from_s": 80_000, "to_bar": 1},
    ],
)
def test_ends_that_may_run_forward_are_accepted(passage: dict[str, Any]) -> None:
    assert read({"passage": passage}).passage.model_dump(exclude_unset=True) == passage


def test_every_fault_is_named_at_once() -> None:
    with pytest.raises(DocumentError) as error:
        read({"discs": 0, "octave_fit": 2, "writing": {"chords": "no"}})

    assert [problem.pointer for problem in error.value.problems] == ["/octave_fit", "/discs", "/writing/chords"]


def test_settings_written_out_and_read_again_are_the_same() -> None:
    settings = read({"passage": {"from_bar": 2, "to_s": 40}, "speed": {"mode": "best"}, "channels": {"lead": 2}})

    assert read_settings(settings.model_dump_json()) == settings


SCHEMA = Settings.model_json_schema()
PROPERTIES = [
    (f"{part}.{name}", schema)
    for part, described in {**SCHEMA["$defs"], "Settings": SCHEMA}.items()
    for name, schema in described["properties"].items()
]


@pytest.mark.parametrize(("name", "schema"), PROPERTIES, ids=[name for name, _ in PROPERTIES])
def test_the_schema_describes_every_field(name: str, schema: dict[str, Any]) -> None:
    assert len(schema.get("description", "")) >= 20, f"{name} has no description"


@pytest.mark.parametrize(("suffix", "unit"), [("_s", "seconds"), ("_ms", "milliseconds"), ("semitones", "semitones")])
def test_the_schema_says_the_unit(suffix: str, unit: str) -> None:
    described = {name: schema["description"] for name, schema in PROPERTIES if name.endswith(suffix)}

    assert described
    assert [name for name, text in described.items() if unit not in text.lower()] == []


@pytest.mark.parametrize(("pointer", "beside", "value"), ACCEPTED)
def test_the_schema_takes_what_the_program_takes(pointer: str, beside: dict[str, Any], value: Any) -> None:
    jsonschema.validate(document(pointer, value, beside), SCHEMA)


@pytest.mark.parametrize("wrong", [{"discs": 25}, {"channels": {"lead": 17}}, {"passage": {"from_bar": 0}}])
def test_the_schema_bounds_whole_numbers(wrong: dict[str, Any]) -> None:
    with pytest.raises(jsonschema.ValidationError, match=r"(maximum|minimum) of"):
        jsonschema.validate(wrong, SCHEMA)
