"""A disc as it sounds, given as a file: whole, or the part of it that a player asks for."""

import hashlib
from collections.abc import Callable
from dataclasses import dataclass

from flask import Request, Response

from layout.documents import Movement
from service.api.hearing_shelf import HearingShelf
from service.api.models.hearings import PlucksQuery, SoundQuery
from service.api.request_models import read_arguments
from service.api.serving import Served, served
from service.media_types import MIDI_MEDIA_TYPE, WAV_MEDIA_TYPE

LAYOUT_ENDING = "_layout.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Heard:
    """What a disc is heard from.

    Attributes:
        layout_json: Its layout.
        movement: The movement it is for.
        layout_name: The name under which its layout.json is saved; the sound's begins alike.
        look_again: Raises what tells that the disc is no longer there, for it may have been deleted while its sound was
            made; None where nobody deletes it.
    """

    layout_json: bytes
    movement: Movement
    layout_name: str
    look_again: Callable[[], object] | None = None


def sound_response(shelf: HearingShelf, heard: Heard, asked: Request) -> Response:
    """hearing.wav of a layout, as the query asks.

    Args:
        shelf: Keeps sounds.
        heard: What it is made from.
        asked: The request.

    Raises:
        ProblemError: The query cannot be used, the range is not in the file, or it would be too long.
        DocumentError: A turn of a winding is asked for that the movement does not state.
    """
    query = read_arguments(asked, SoundQuery)
    return _response(shelf, heard, query, (_saved_as(heard.layout_name, query, ".wav"), WAV_MEDIA_TYPE), asked)


def plucks_response(shelf: HearingShelf, heard: Heard, asked: Request) -> Response:
    """hearing.mid of a layout; as `sound_response`."""
    query = read_arguments(asked, PlucksQuery)
    return _response(shelf, heard, query, (_saved_as(heard.layout_name, query, ".mid"), MIDI_MEDIA_TYPE), asked)


def _response(shelf: HearingShelf, heard: Heard, query: PlucksQuery, told: tuple[str, str], asked: Request) -> Response:
    saved_as, media_type = told
    kept = shelf.sound(heard.layout_json, heard.movement, query)
    if kept.is_new and heard.look_again is not None:
        try:
            heard.look_again()
        except Exception:
            shelf.forget([hashlib.sha256(heard.layout_json).hexdigest()])
            raise
    file = Served(
        digest=kept.digest,
        byte_count=kept.byte_count,
        media_type=media_type,
        saved_as=saved_as,
        how="inline",
        max_age_s=0,
    )
    response = served(shelf, file, asked)
    # Another program may make another sound of the same layout, so that a kept one is asked after each time.
    response.headers["Cache-Control"] = "private, no-cache"
    return response


def _saved_as(layout_name: str, query: PlucksQuery, ending: str) -> str:
    name = layout_name.removesuffix(LAYOUT_ENDING)
    of = "as-written" if query.of == "written" else "as-played"
    return f"{name}_{of}{'' if query.turn == 'steady' else f'_{query.turn}-turn'}{ending}"
