"""Discs as they sound, over HTTP: whole and in parts, kept as files, of layouts, orders and proofs alike."""

import errno
import hashlib
import io
import os
import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import symusic
from werkzeug.test import TestResponse

from service.api import hearing_shelf
from service.api.hearing_shelf import HearingShelf
from service.app import create_app
from service.limits import Limits
from service.parts import Parts
from service.settings import AccessSettings
from tests.layout.hear.sounds import read_wav
from tests.service.api.described import World
from tests.service.conftest import parts_of
from tests.service.fakes import MANY
from tests.service.shop import TUNE


def app_of(parts: Parts, limits: Limits | None = None) -> World:
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    settings = replace(parts.settings, access=access, limits=limits or parts.settings.limits)
    return World(app=create_app(settings), parts=parts)


@pytest.fixture(scope="module")
def world(tmp_path_factory: pytest.TempPathFactory) -> Iterator[World]:
    parts = parts_of(tmp_path_factory.mktemp("hearings"))
    yield app_of(parts)
    parts.store.close()


@pytest.fixture(scope="module")
def addresses(world: World) -> dict[str, str]:
    """Where one disc is heard as a layout, of an order, and by a proof."""
    layout, order, proof = (world.given(what) for what in ("a layout", "a ready order", "a proof"))
    return {
        "layout": f"/v1/layouts/{layout['fingerprint']}/hearing",
        "order": f"/v1/orders/{order['order_id']}/plans/1/files/1/hearing",
        "proof": f"/v1/proofs/{proof['text']}/files/1/hearing",
    }


def get(world: World, path: str, **headers: str) -> TestResponse:
    named = {name.replace("_", "-"): value for name, value in headers.items()}
    return world.http.get(path, headers={**world.headers, **named})


def kept_in(parts: Parts) -> list[Path]:
    return sorted((parts.settings.cache_directory / "hearings").glob("*.sound"))


@pytest.mark.parametrize("whose", ["layout", "order", "proof"])
def test_a_disc_is_given_as_sound_and_as_plucks(world: World, addresses: dict[str, str], whose: str) -> None:
    sound, plucks = (get(world, f"{addresses[whose]}.{ending}") for ending in ("wav", "mid"))

    assert (sound.status_code, sound.content_type) == (200, "audio/wav")
    assert (plucks.status_code, plucks.content_type) == (200, "audio/midi")
    assert abs(read_wav(io.BytesIO(sound.data))).max() == pytest.approx(10 ** (-1 / 20), abs=2e-5)
    notes: Any = symusic.Score.from_midi(plucks.data)
    assert notes.note_num() == 4  # the small tune's
    assert "fernhollow-31-r1" in sound.headers["Content-Disposition"]
    assert sound.headers["Content-Disposition"].endswith('_as-played.wav"')


def test_a_layout_and_a_proof_say_where_they_are_heard(world: World, addresses: dict[str, str]) -> None:
    layout = get(world, addresses["layout"].removesuffix("/hearing")).json
    proof = get(world, addresses["proof"].removesuffix("/files/1/hearing")).json
    assert layout is not None
    assert proof is not None

    told = {"layout": layout["links"], "proof": proof["discs"][0]["files"]}

    for whose, files in told.items():
        for name in ("hearing.wav", "hearing.mid"):
            assert files[name] == f"{addresses[whose]}{name.removeprefix('hearing')}"
            assert get(world, files[name], Range="bytes=0-3").status_code == 206


def test_a_layout_that_is_given_for_a_reason_is_heard_without_one(world: World) -> None:
    settings = {"tune": (io.BytesIO(TUNE), "a.mid"), "settings": (io.BytesIO(b"{}"), "s.json")}
    asked = "/v1/layouts?movement=tarnlight-17&despite_findings=trial"
    made = world.http.post(asked, data=settings, headers=world.headers).get_json()

    assert made["good_to_cut"] is False  # the demo tune is longer than its turn
    assert "despite_findings" in made["links"]["disc.dxf"]
    assert get(world, made["links"]["hearing.mid"]).status_code == 200


def test_a_sound_is_the_same_to_the_byte_for_all_who_may_hear_it(world: World, addresses: dict[str, str]) -> None:
    sounds = [get(world, f"{address}.wav") for address in addresses.values()]

    assert len({hashlib.sha256(sound.data).hexdigest() for sound in sounds}) == 1
    assert len({sound.headers["ETag"] for sound in sounds}) == 1


def test_a_part_is_sent_where_a_part_is_asked_for(world: World, addresses: dict[str, str]) -> None:
    whole = get(world, f"{addresses['layout']}.wav")

    part = get(world, f"{addresses['layout']}.wav", Range="bytes=44-143")
    end = get(world, f"{addresses['layout']}.wav", Range="bytes=-10")

    assert (part.status_code, part.data) == (206, whole.data[44:144])
    assert part.headers["Content-Range"] == f"bytes 44-143/{len(whole.data)}"
    assert (end.status_code, end.data) == (206, whole.data[-10:])
    assert whole.headers["Accept-Ranges"] == "bytes"


def test_a_part_past_the_end_is_refused(world: World, addresses: dict[str, str]) -> None:
    length = len(get(world, f"{addresses['layout']}.wav").data)

    answer = get(world, f"{addresses['layout']}.wav", Range=f"bytes={length}-")

    assert answer.status_code == 416
    assert answer.headers["Content-Range"] == f"bytes */{length}"


def test_a_part_of_another_sound_is_not_joined_to_it(world: World, addresses: dict[str, str]) -> None:
    tag = get(world, f"{addresses['layout']}.wav").headers["ETag"]

    same = get(world, f"{addresses['layout']}.wav", Range="bytes=0-9", If_Range=tag)
    other = get(world, f"{addresses['layout']}.wav", Range="bytes=0-9", If_Range='"another"')

    assert (same.status_code, other.status_code) == (206, 200)


def test_what_a_client_has_is_not_sent_again(world: World, addresses: dict[str, str]) -> None:
    tag = get(world, f"{addresses['layout']}.wav").headers["ETag"]

    answer = get(world, f"{addresses['layout']}.wav", If_None_Match=tag)

    assert (answer.status_code, answer.data) == (304, b"")


def test_the_query_says_how_it_is_heard(world: World, addresses: dict[str, str]) -> None:
    plain = get(world, f"{addresses['layout']}.wav")
    fine = get(world, f"{addresses['layout']}.wav?of=written&bits=24")
    unknown = get(world, f"{addresses['layout']}.wav?bits=20")

    assert fine.data[34:36] == (24).to_bytes(2, "little")
    assert plain.headers["ETag"] != fine.headers["ETag"]
    assert fine.headers["Content-Disposition"].endswith('_as-written.wav"')
    assert (unknown.status_code, unknown.json and unknown.json["type"]) == (400, "/problems/parameter-invalid")


def test_a_turn_of_a_winding_nobody_stated_is_told_with_its_place(world: World, addresses: dict[str, str]) -> None:
    answer = get(world, f"{addresses['layout']}.wav?turn=last")

    assert answer.json is not None
    assert (answer.status_code, answer.json["type"]) == (422, "/problems/document-invalid")
    assert "/drive/winding" in answer.text


def test_a_sound_is_made_once(world: World, addresses: dict[str, str], monkeypatch: pytest.MonkeyPatch) -> None:
    first = get(world, f"{addresses['layout']}.wav")
    kept = kept_in(world.parts)
    monkeypatch.setattr(HearingShelf, "_made", None)  # whoever calls it, fails

    again = get(world, f"{addresses['layout']}.wav", Range="bytes=0-3")

    assert (first.status_code, again.status_code) == (200, 206)
    assert kept_in(world.parts) == kept
    assert hashlib.sha256(first.data).hexdigest() in {path.stem.rpartition("-")[2] for path in kept}


def test_a_sound_longer_than_is_made_is_refused_but_not_its_plucks(world: World, addresses: dict[str, str]) -> None:
    get(world, f"{addresses['layout']}.wav?of=written&bits=24")
    short = app_of(world.parts, replace(world.parts.settings.limits, hearing_s=60))

    sound = get(short, f"{addresses['layout']}.wav?of=written&bits=24&turn=steady", Range="bytes=0-3")
    for path in kept_in(world.parts):
        path.unlink()
    refused = get(short, f"{addresses['layout']}.wav")
    plucks = get(short, f"{addresses['layout']}.mid")

    assert (sound.status_code, plucks.status_code) == (206, 200)  # it was made before
    assert refused.json is not None
    assert (refused.status_code, refused.json["type"].rpartition("/")[2]) == (422, "hearing-too-long")
    assert refused.json["most_s"] == 60


def test_the_least_recently_heard_goes_where_all_are_too_large(world: World, addresses: dict[str, str]) -> None:
    # A turn of 66 s is 6.3 MB in 16 bits: one fits into 7 MB.
    small = app_of(world.parts, replace(world.parts.settings.limits, hearing_bytes=7_000_000))
    for path in kept_in(world.parts):
        path.unlink()

    get(small, f"{addresses['layout']}.wav")
    first = kept_in(world.parts)
    get(small, f"{addresses['layout']}.wav?of=written")

    assert len(first) == 1
    assert len(kept_in(world.parts)) == 1
    assert kept_in(world.parts) != first


def test_a_sound_nobody_hears_is_gone_when_another_is_made(world: World, addresses: dict[str, str]) -> None:
    get(world, f"{addresses['layout']}.wav")
    for path in kept_in(world.parts):
        os.utime(path, times=(0, time.time() - 86_500))
    part = world.parts.settings.cache_directory / "hearings" / "stopped.part"
    part.write_bytes(b"half")
    os.utime(part, times=(0, 0))

    get(world, f"{addresses['layout']}.mid?of=written")

    assert len(kept_in(world.parts)) == 1
    assert not part.exists()


def test_a_disc_the_plan_does_not_have_is_not_heard(world: World, addresses: dict[str, str]) -> None:
    answer = get(world, addresses["order"].replace("/files/1/", "/files/2/") + ".wav")

    assert answer.status_code == 404


def test_a_sound_that_finds_no_room_leaves_nothing_behind(
    world: World, addresses: dict[str, str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_source: object, _target: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    before = kept_in(world.parts)
    monkeypatch.setattr(hearing_shelf.os, "replace", full)

    answer = get(world, f"{addresses['layout']}.wav?bits=24&of=written")

    assert answer.status_code == 507
    assert kept_in(world.parts) == before
    assert list((world.parts.settings.cache_directory / "hearings").glob("*.part")) == []
