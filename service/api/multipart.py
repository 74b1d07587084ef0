"""The parts of a multipart/form-data body (RFC 7578), as the bytes they were sent as.

The form parser of the web library turns parts without a file name into text, which a MIDI file does not
survive; so its decoder is driven here, and a part counts the same with a file name or without.
"""

import re
from collections.abc import Iterable, Iterator
from itertools import chain

from werkzeug.exceptions import RequestEntityTooLarge
from werkzeug.sansio.multipart import Data, Epilogue, Event, Field, File, MultipartDecoder, NeedData

from service.api.problems import ProblemError

ID = "ID"  # at the end of the name of a part, for any id of a document
_AN_ID = re.compile(r"[a-z][a-z0-9-]{0,63}")  # as the documents have them
_SHOWN_CHARACTERS = 80  # of a name that is none, so that the answer stays readable


def parts_of(body: bytes, *, boundary: str | None, known: tuple[str, ...], most_parts: int) -> dict[str, bytes]:
    """The parts of a body by name; as `parts_in`, of a body that is there as a whole."""
    return parts_in((body,), boundary=boundary, known=known, most_parts=most_parts)


def parts_in(
    body: Iterable[bytes], *, boundary: str | None, known: tuple[str, ...], most_parts: int
) -> dict[str, bytes]:
    """The parts by name.

    Args:
        body: The request's body, piece by piece, so that a large one is in memory once and not several times.
        boundary: Of the header Content-Type; None where it states none.
        known: Names that parts may have; one that ends in ID, such as drawing-ID, stands for those with an id there.
        most_parts: How many parts the body may have.

    Raises:
        ProblemError: The body cannot be taken apart, has too many parts, or a part is unknown or comes twice.
    """
    if not boundary:
        raise _unreadable("the header Content-Type states no boundary")
    decoder = MultipartDecoder(boundary.encode("latin-1", "replace"), max_parts=most_parts)
    parts: dict[str, bytearray] = {}
    name = ""
    for event in _events(decoder, body):
        if isinstance(event, Field | File):
            name = event.name
            if name is None:  # whatever the library's types say
                raise _unreadable("a part lacks its name")
            if not any(_is_called(name, listed) for listed in known):
                shown = name[:_SHOWN_CHARACTERS]
                raise _invalid(shown, f"there is no part called {shown!r}; the parts are {', '.join(known)}")
            if name in parts:
                raise _invalid(name, f"the part {name} comes twice; send it once")
            parts[name] = bytearray()
        elif isinstance(event, Data):
            parts[name] += event.data
    return {
        name: bytes(parts.pop(name)) for name in list(parts)
    }  # one after the other, so that one alone is there twice


def _is_called(name: str, listed: str) -> bool:
    """Whether a name is the one listed, or one of those it stands for."""
    begins = listed.removesuffix(ID)
    if begins == listed:
        return name == listed
    return name.startswith(begins) and _AN_ID.fullmatch(name.removeprefix(begins)) is not None


def _events(decoder: MultipartDecoder, body: Iterable[bytes]) -> Iterator[Event]:
    try:
        for chunk in chain(body, [None]):  # None: nothing follows
            decoder.receive_data(chunk)
            while not isinstance(event := decoder.next_event(), Epilogue | NeedData):
                yield event
    except RequestEntityTooLarge as refusal:
        raise _unreadable("it has too many parts") from refusal
    except (ValueError, KeyError) as fault:
        raise _unreadable("it does not end with its boundary, or a part lacks its name") from fault


def _invalid(name: str, detail: str) -> ProblemError:
    return ProblemError(name="parameter-invalid", detail=detail, more={"parameter": name})


def _unreadable(why: str) -> ProblemError:
    return ProblemError(name="multipart-unreadable", detail=f"the multipart body cannot be taken apart: {why}")
