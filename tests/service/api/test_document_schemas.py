"""The published schemas of documents say what reading checks: held against jsonschema, which is none of our code."""

import copy
import json
import math
import re
from collections.abc import Callable, Iterator
from typing import Any

import jsonschema  # type: ignore[import-untyped]
import pytest
from hypothesis import given
from hypothesis import strategies as st

from layout.documents import read_cutter, read_movement, read_settings
from layout.documents.pitch import key_of
from layout.documents.sheets import read_sheet_job
from layout.errors import DocumentError
from service.api.api_schemas import DOCUMENTS, schema_alone
from tests.service.api.whole_documents import EXAMPLES, JOB, LANCE, LASER, PRESS, SETTINGS, STANDING

Path = tuple[str | int, ...]
READERS: dict[str, Callable[[str], Any]] = {
    "movement": read_movement,
    "cutter": read_cutter,
    "settings": read_settings,
    "sheet-job": read_sheet_job,
}
SCHEMAS = {kind: json.loads(json.dumps(schema_alone(model))) for kind, model in DOCUMENTS.items()}
CHECKS = {kind: jsonschema.Draft202012Validator(schema) for kind, schema in SCHEMAS.items()}
# Counted without end: no number of them is too great for a document by itself.
ONE_SIDED = {"revision", "track", "tooth", "note", "quantity"}
RANGE = re.compile("Input should be (greater|less) than")
ENDS = ("minimum", "exclusiveMinimum", "maximum", "exclusiveMaximum")


def resolved(schema: Any, root: Any) -> Any:
    return resolved(root["$defs"][schema["$ref"].rpartition("/")[2]], root) if "$ref" in schema else schema


def choices(schema: Any, root: Any) -> list[Any]:
    listed = schema.get("anyOf") or schema.get("oneOf")
    return [resolved(schema, root)] if not listed else [one for part in listed for one in choices(part, root)]


def schemas_at(kind: str, path: Path, value: Any) -> list[Any]:
    """What the schema of a kind says of a place of a value, by every choice that leads there."""
    root = SCHEMAS[kind]
    found = choices(root, root)
    for part in path:
        inner = []
        for one in found:
            if isinstance(part, int):
                inner += (
                    [one["prefixItems"][part]] if "prefixItems" in one else [one["items"]] if "items" in one else []
                )
            else:
                inner += [one["properties"][part]] if part in one.get("properties", {}) else []
                inner += [one["additionalProperties"]] if isinstance(one.get("additionalProperties"), dict) else []
        found = [choice for one in inner for choice in choices(resolved(one, root), root)]
    return found


def leaves(value: Any, path: Path = ()) -> Iterator[tuple[Path, Any]]:
    if isinstance(value, dict):
        for name, part in value.items():
            yield from leaves(part, (*path, name))
    elif isinstance(value, list):
        for place, part in enumerate(value):
            yield from leaves(part, (*path, place))
    else:
        yield path, value


def members(value: Any, path: Path = ()) -> Iterator[Path]:
    if isinstance(value, dict):
        for name, part in value.items():
            yield (*path, name)
            yield from members(part, (*path, name))
    elif isinstance(value, list):
        for place, part in enumerate(value):
            yield from members(part, (*path, place))


def with_value(document: Any, path: Path, value: Any) -> Any:
    made = copy.deepcopy(document)
    inner = made
    for part in path[:-1]:
        inner = inner[part]
    inner[path[-1]] = value
    return made


def without(document: Any, path: Path) -> Any:
    made = copy.deepcopy(document)
    inner = made
    for part in path[:-1]:
        inner = inner[part]
    del inner[path[-1]]
    return made


def pointer(path: Path) -> str:
    return "".join(f"/{part}" for part in path)


def named_by_the_schema(kind: str, document: Any) -> set[str]:
    """The places that the validator finds wrong."""

    def within(error: Any) -> Iterator[str]:
        yield pointer(tuple(error.absolute_path))
        for inner in error.context or ():
            yield from within(inner)

    return {place for error in CHECKS[kind].iter_errors(document) for place in within(error)}


def told_by_reading(kind: str, document: Any) -> dict[str, str]:
    try:
        READERS[kind](json.dumps(document))
    except DocumentError as error:
        return {problem.pointer: problem.message for problem in error.problems}
    return {}


def out_of_range_by_reading(kind: str, document: Any) -> set[str]:
    """The places that reading finds out of range; what does not go together is none of them."""
    return {place for place, message in told_by_reading(kind, document).items() if RANGE.search(message)}


def numbers_of_all() -> list[tuple[int, Path]]:
    return [
        (place, path)
        for place, (_, document) in enumerate(EXAMPLES)
        for path, value in leaves(document)
        if isinstance(value, int | float) and not isinstance(value, bool)
    ]


def range_of(kind: str, path: Path, document: Any) -> dict[str, float]:
    plain = [one for one in schemas_at(kind, path, document) if one.get("type") in ("number", "integer")]
    ranges = [{end: one[end] for end in ENDS if end in one} for one in plain]
    assert len({tuple(one.items()) for one in ranges}) == 1, (pointer(path), plain)
    return ranges[0]


def about(kind: str, path: Path, document: Any) -> Iterator[tuple[float, bool]]:
    """Values next to each end of a member's range, and whether they are within."""
    whole = any(one.get("type") == "integer" for one in schemas_at(kind, path, document))
    for end, bound in range_of(kind, path, document).items():
        way = -math.inf if end in ("minimum", "exclusiveMinimum") else math.inf
        beyond: float = bound + (1 if way > 0 else -1) if whole else math.nextafter(bound, way)
        if end in ("minimum", "maximum"):
            yield bound, True
            yield beyond, False
        else:
            yield math.nextafter(bound, -way), True
            yield bound, False


NUMBERS = numbers_of_all()
EACH_NUMBER = pytest.mark.parametrize(
    ("place", "path"), NUMBERS, ids=[f"{EXAMPLES[place][0]}{place}{pointer(path)}" for place, path in NUMBERS]
)


@pytest.mark.parametrize("place", range(len(EXAMPLES)))
def test_the_documents_tried_here_are_whole_and_valid_by_both(place: int) -> None:
    kind, document = EXAMPLES[place]

    CHECKS[kind].validate(document)
    assert told_by_reading(kind, document) == {}


def test_every_number_of_every_kind_of_document_is_tried_here() -> None:
    def numbers(schema: Any, root: Any, path: str) -> Iterator[str]:
        for one in choices(resolved(schema, root), root):
            if one.get("type") in ("number", "integer"):
                yield path
            if "plus_minus" not in one.get("properties", {}):
                for name, part in one.get("properties", {}).items():
                    yield from numbers(part, root, f"{path}/{name}")
            for part in (*one.get("prefixItems", ()), one.get("items"), one.get("additionalProperties")):
                if isinstance(part, dict):
                    yield from numbers(part, root, path)

    said = {kind + place for kind, schema in SCHEMAS.items() for place in numbers(schema, schema, "")}
    tried = {
        EXAMPLES[place][0] + pointer(tuple(part for part in path if isinstance(part, str) and part != "RIM"))
        for place, path in NUMBERS
    }

    assert tried == said


@EACH_NUMBER
def test_a_number_next_to_an_end_of_its_range_is_taken_or_refused_alike_by_schema_and_reading(
    place: int, path: Path
) -> None:
    kind, document = EXAMPLES[place]
    ends = range_of(kind, path, document)

    assert any("inimum" in end for end in ends), "the schema has no least value"
    assert any("aximum" in end for end in ends) or path[-1] in ONE_SIDED, "the schema has no greatest value"
    for value, is_within in about(kind, path, document):
        tried = with_value(document, path, value)
        by_schema = pointer(path) in named_by_the_schema(kind, tried)
        by_reading = pointer(path) in out_of_range_by_reading(kind, tried)
        assert (by_schema, by_reading) == (not is_within, not is_within), value


STATED = [
    (place, path)
    for place, path in NUMBERS
    if any(
        "plus_minus" in one.get("properties", {}) for one in schemas_at(EXAMPLES[place][0], path, EXAMPLES[place][1])
    )
]


@given(
    chosen=st.sampled_from(STATED),
    value=st.one_of(st.floats(allow_nan=False, allow_infinity=False), st.floats(-10, 10), st.integers(-400, 7000)),
    off=st.one_of(st.just(0.1), st.floats(-1, 1), st.sampled_from([0, 1e9, math.nextafter(1e9, 2e9), -5e-324])),
)
def test_a_number_stated_with_its_worth_is_taken_or_refused_alike_by_schema_and_reading(
    chosen: tuple[int, Path], value: float, off: float
) -> None:
    place, path = chosen
    kind, document = EXAMPLES[place]
    tried = with_value(document, path, {"value": value, "plus_minus": off})

    by_reading = out_of_range_by_reading(kind, tried)
    plain = with_value(document, path, value)
    is_off_wrong = f"{pointer(path)}/plus_minus" in by_reading
    is_value_wrong = pointer(path) in out_of_range_by_reading(kind, plain)

    named = named_by_the_schema(kind, tried)
    assert (pointer(path) in named) == (is_off_wrong or is_value_wrong)
    assert (f"{pointer(path)}/plus_minus" in named) == is_off_wrong
    assert (pointer(path) in by_reading) == (is_value_wrong and not is_off_wrong)  # worths are read first


MEMBERS = [(place, path) for place, (_, document) in enumerate(EXAMPLES) for path in members(document)]


@pytest.mark.parametrize(
    ("place", "path"), MEMBERS, ids=[f"{EXAMPLES[place][0]}{place}{pointer(path)}" for place, path in MEMBERS]
)
def test_a_member_that_is_left_out_is_missed_by_both_or_by_neither(place: int, path: Path) -> None:
    kind, document = EXAMPLES[place]
    tried = without(document, path)

    is_missed = named_by_the_schema(kind, tried) != set()

    assert (told_by_reading(kind, tried) != {}) == is_missed
    asked = [one.get("required", ()) for one in schemas_at(kind, path[:-1], document) if "properties" in one]
    is_needed = any(path[-1] in names for names in asked)
    assert is_missed or not is_needed


def test_the_side_that_is_drawn_may_be_left_out_where_the_press_says_how_it_forms_and_nowhere_else() -> None:
    bent_up = without(PRESS, ("drawn_from",))

    assert (named_by_the_schema("cutter", bent_up), told_by_reading("cutter", bent_up)) == (set(), {})
    for unsaid in (without(LASER, ("drawn_from",)), without(bent_up, ("press", "forms")), without(bent_up, ("press",))):
        assert named_by_the_schema("cutter", unsaid) == {""}
        assert told_by_reading("cutter", unsaid) == {"/drawn_from": "this field is needed"}


@pytest.mark.parametrize(
    ("kind", "wrong"),
    [(kind, wrong) for kind in ("movement", "cutter") for wrong in ("", "A", "9a", "a_b", "a" * 65, "ä", " a", "a ")],
)
def test_an_id_that_reading_refuses_is_refused_by_the_schema(kind: str, wrong: str) -> None:
    document = {**dict(EXAMPLES)[kind], "id": wrong}

    assert named_by_the_schema(kind, document) == told_by_reading(kind, document).keys() == {"/id"}


def test_every_name_of_a_pitch_is_taken_or_refused_alike() -> None:
    names = [
        f"{letter}{alter}{octave}" for letter in "ABCDEFGH" for alter in ("", "#", "b", "x") for octave in range(-2, 11)
    ]
    pattern = re.compile(SCHEMAS["movement"]["$defs"]["Tooth"]["properties"]["pitch"]["pattern"])

    def is_pitch(name: str) -> bool:
        try:
            return key_of(name) >= 0
        except ValueError:
            return False

    assert [name for name in names if bool(pattern.search(name)) != is_pitch(name)] == []
    assert sum(map(is_pitch, names)) > 200


@pytest.mark.parametrize(
    ("kind", "path", "value"),
    [
        ("movement", ("projection", "depth_mm"), None),
        ("movement", ("projection", "kind"), "slot"),
        ("cutter", ("layers",), {"EDGES": {"name": "A", "colour": 1}}),
        ("cutter", ("fold", "slit"), "centre-line"),
        ("cutter", ("tools",), [LANCE]),
        ("cutter", ("kind",), "punch-press"),
        ("cutter", ("rates", "setup"), "१.५"),
        ("settings", ("transpose", "mode"), "best"),
        ("settings", ("rulings", 0, "do"), "must-sound"),
        ("settings", ("speed", "mode"), "fit"),
        ("sheet-job", ("stock",), []),
        ("sheet-job", ("discs",), []),
        ("sheet-job", ("stock", 0, "openings_mm", 0), [[0, 0], [1, 1]]),
        ("sheet-job", ("stock", 0, "outline_mm"), [[0, 0], [400, 0], [0, 400]]),
    ],
)
def test_what_does_not_go_together_is_refused_by_the_schema_where_it_can_say_so(
    kind: str, path: Path, value: Any
) -> None:
    examples = {"movement": STANDING, "cutter": LASER, "settings": SETTINGS, "sheet-job": JOB}
    document = with_value(examples[kind], path, value)

    assert named_by_the_schema(kind, document) != set()
    assert told_by_reading(kind, document) != {}
