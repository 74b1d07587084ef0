"""A real layout, heard from its layout.json and its movement alone."""

import json
from functools import cache
from typing import Any

import numpy as np
import pytest

from layout import walk
from layout.documents import Movement, read_settings
from layout.hear import Asked
from layout.hearing_walk import Hearing, hearing_of, performance_of, steady_turn_of
from layout.write import write_layout_json
from layout.write.laid_out import LaidOut
from service.demo.compose import demo_tune
from tests.layout.examples import LASER, SHIPPED
from tests.layout.hear.sounds import onsets_s, samples_of


@cache
def laid_out_on(movement_id: str) -> LaidOut:
    [movement] = [one for one in SHIPPED if one.id == movement_id]
    return walk.lay_out(demo_tune(), movement, LASER, read_settings("{}"))


def layout_json(movement: Movement) -> bytes:
    return write_layout_json(laid_out_on(movement.id), despite_findings=None)


def heard(movement: Movement, asked: Asked | None = None) -> tuple[dict[str, Any], Hearing]:
    return json.loads(layout_json(movement)), hearing_of(layout_json(movement), movement, asked or Asked())


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_plucks_read_back_from_a_layout_are_those_the_walk_played(movement: Movement) -> None:
    played = laid_out_on(movement.id).plucks

    read = performance_of(json.loads(layout_json(movement)), movement).plucks

    assert np.array_equal(read.track_index, played.track_index)
    assert np.array_equal(read.sounds_s, played.sounds_s)
    assert np.array_equal(read.silent_from_s, played.silent_from_s)


@pytest.mark.parametrize("movement", [SHIPPED[0], SHIPPED[2]], ids=lambda movement: movement.id)
def test_every_pluck_of_a_real_disc_is_heard_within_two_milliseconds_of_its_moment(movement: Movement) -> None:
    # Each track by itself, with a comb that rings on, so that nothing but dampers makes silence. No drive: no start.
    layout, _ = heard(movement)
    begins_s = movement.before_music_deg / 360 * movement.revolution_s
    ringing = movement.model_copy(update={"tooth_quality": 20_000.0})
    off_s: list[float] = []
    for track in sorted({projection["track"] for projection in layout["projections"]})[::4]:
        own = [projection for projection in layout["projections"] if projection["track"] == track]
        alone = json.dumps({**layout, "projections": own}).encode()
        found = onsets_s(samples_of(hearing_of(alone, ringing, Asked()), 16))
        off_s += np.subtract(found, sorted(begins_s + projection["sounds_s"] for projection in own)).tolist()

    assert len(off_s) > 20
    assert max(map(abs, off_s)) < 0.002


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_every_note_asked_for_is_heard_as_written_and_in_its_place(movement: Movement) -> None:
    layout, as_written = heard(movement, Asked(of="written"))

    asked = {
        (note["pitch"], round((note["onset_s"] - layout["from_s"]) / layout["speed_factor"], 6))
        for note in layout["notes"]
        if note["weight"] > 0
    }
    rings = {(ring.key, round(ring.starts_s, 3)) for ring in as_written.rings}

    assert len(rings) == len(asked)


def test_a_note_left_out_is_heard_as_written_alone() -> None:
    layout, disc = heard(SHIPPED[2])
    _, as_written = heard(SHIPPED[2], Asked(of="written"))

    assert len(layout["left_out"]) > 0
    assert len({(ring.key, ring.starts_s) for ring in as_written.rings}) > len({ring.starts_s for ring in disc.rings})


def test_notes_placed_without_a_nudge_sound_at_one_time_both_ways() -> None:
    layout, disc = heard(SHIPPED[0])
    _, as_written = heard(SHIPPED[0], Asked(of="written"))
    untouched = [one for one in layout["projections"] if one["asked_s"] == pytest.approx(one["sounds_s"], abs=1e-9)]

    written_s = np.array([ring.starts_s for ring in as_written.rings])
    disc_s = sorted({ring.starts_s for ring in disc.rings})

    assert len(untouched) > 10
    together = sum(np.abs(written_s - moment).min() < 1e-6 for moment in disc_s)
    assert together >= len({round(one["sounds_s"], 6) for one in untouched})


def test_notes_as_written_are_transposed_as_the_disc_is() -> None:
    layout, _ = heard(SHIPPED[0])

    plain, higher = (
        performance_of({**layout, "transposed_semitones": semitones}, SHIPPED[0]).written_key for semitones in (0, 3)
    )

    assert len(plain) > 0
    assert np.array_equal(higher, plain + 3)


def test_a_layout_of_another_movement_is_a_fault_of_the_program() -> None:
    with pytest.raises(ValueError, match="cannot be heard on tarnlight-17"):
        hearing_of(layout_json(SHIPPED[0]), SHIPPED[2], Asked())


@pytest.mark.parametrize("movement", SHIPPED, ids=lambda movement: movement.id)
def test_a_movement_turns_by_itself_as_in_a_steady_hearing(movement: Movement) -> None:
    _, hearing = heard(movement)

    assert np.array_equal(steady_turn_of(movement), hearing.turning_table)
