"""What a POST of a layout brings: the tune, and which movement, cutter and settings it is for."""

from collections.abc import Iterator

from flask import Request

from layout.documents import shipped_movement_ids
from service.api.failures import too_large
from service.api.models.layouts import LayoutQuery
from service.api.multipart import parts_of
from service.api.problems import ProblemError
from service.documents import Inputs, Shipped, Source, Written, default_cutter
from service.limits import Limits

# audio/midi is what MIDI files are sent as; no type is registered for them, so its common twins are taken too.
TUNE_MEDIA_TYPES = ("audio/midi", "audio/x-midi", "audio/mid", "application/x-midi", "application/octet-stream")
FORM_MEDIA_TYPE = "multipart/form-data"
MEDIA_TYPES = (*TUNE_MEDIA_TYPES, FORM_MEDIA_TYPE)
DOCUMENT_PARTS = ("settings", "movement", "cutter")
PIECE_BYTES = 256 * 1024  # read at a time


def read_posted(request: Request, query: LayoutQuery, limits: Limits) -> Inputs:
    """The inputs of a layout, as a request brings them.

    Args:
        request: Its body is read here; up to its limit.
        query: The request's query.
        limits: Read for limits.

    Raises:
        ProblemError: The body is too large, of another media type, holds no tune, or cannot be taken
            apart; a movement or cutter is missing or given twice.
    """
    parts = _parts(request, limits)
    tune = parts.get("tune", b"")
    if not tune:
        raise ProblemError(
            name="tune-missing", detail="the request brings no tune: its body, or the part tune, is empty"
        )
    for name in DOCUMENT_PARTS:
        if len(parts.get(name, b"")) > limits.document_bytes:
            raise too_large(limits.document_bytes, f"the part {name}")
    movement = source_of("movement", query.movement, parts.get("movement"))
    if movement is None:
        raise ProblemError(
            name="parameter-missing",
            detail=f"no movement is named; add ?movement=ID, one of {', '.join(shipped_movement_ids())}",
            more={"parameter": "movement", "known_ids": list(shipped_movement_ids())},
        )
    cutter = source_of("cutter", query.cutter, parts.get("cutter")) or default_cutter()
    return Inputs(tune=tune, movement=movement, cutter=cutter, settings=parts.get("settings", b"{}"))


def _parts(request: Request, limits: Limits) -> dict[str, bytes]:
    coding = request.headers.get("Content-Encoding", "identity").strip().lower()
    if coding != "identity":
        raise _unsupported(f"the body is packed ({coding!r}); send it as it is", {"Accept-Encoding": "identity"})
    if request.mimetype == FORM_MEDIA_TYPE:
        return parts_of(
            body_of(request, limits.upload_bytes),
            boundary=request.mimetype_params.get("boundary"),
            known=("tune", *DOCUMENT_PARTS),
            most_parts=limits.form_parts,
        )
    if request.mimetype in TUNE_MEDIA_TYPES or not request.mimetype:
        return {"tune": body_of(request, limits.upload_bytes)}
    raise _unsupported(f"{request.mimetype!r} is not taken; taken are {', '.join(MEDIA_TYPES)}", {})


def body_of(request: Request, most_bytes: int) -> bytes:
    """The whole body; the web library would cut off a chunked one at its limit and say nothing.

    Raises:
        ProblemError: It is too large, or ended too early.
    """
    return b"".join(pieces_of(request, most_bytes))


def pieces_of(request: Request, most_bytes: int) -> Iterator[bytes]:
    """The body piece by piece.

    Raises:
        ProblemError: It is too large, or ended too early.
    """
    length = request.content_length
    if length is not None and length > most_bytes:
        raise too_large(most_bytes, "the request body")
    seen = 0
    while piece := request.stream.read(min(PIECE_BYTES, most_bytes + 1 - seen)):
        seen += len(piece)
        if seen > most_bytes:
            raise too_large(most_bytes, "the request body")
        yield piece
    if length is not None and seen < length:
        raise ProblemError(
            name="request-malformed",
            detail=f"the body ended after {seen} bytes, but Content-Length says {length}; send it again",
        )


def _unsupported(detail: str, headers: dict[str, str]) -> ProblemError:
    return ProblemError(
        name="media-type-unsupported",
        detail=detail,
        more={"allowed_types": list(MEDIA_TYPES)},
        headers={"Accept-Post": ", ".join(MEDIA_TYPES), **headers},
    )


def source_of(name: str, named: str | None, written: bytes | None) -> Source | None:
    """Where a document comes from: named in the query, brought as a part, or neither.

    Raises:
        ProblemError: It is given both ways.
    """
    if named is not None and written is not None:
        raise ProblemError(
            name="parameter-invalid",
            detail=f"a {name} is given twice: as the parameter {name}={named} and as a part; give one of them",
            more={"parameter": name},
        )
    if written is not None:
        return Written(text=written)
    return None if named is None else Shipped(id=named)
