"""/v1/layouts: a tune becomes a layout, or one for each disc it is cut into; a layout gives its files."""

import hashlib
import json
import re
from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Any
from urllib.parse import urlencode

from flask import Blueprint, Request, Response, request

from layout.documents import Settings
from layout.file_names import CUTTING_FILES, FILES, HEARING_FILES, TOLD_FILES, files_for
from service.access.scopes import Scope
from service.api.answers import ONLY_OWN_STYLES, conditional, json_bytes_of_read, json_bytes_response, matches
from service.api.archive import ZIP_MEDIA_TYPE, archive_of
from service.api.asking import asker_or_none, open_on_loopback
from service.api.describing import describes
from service.api.desk import LayoutDesk
from service.api.hearing_shelf import HearingShelf
from service.api.hearings import Heard, plucks_response, sound_response
from service.api.layout_cache import KeptLayout
from service.api.models.layouts import DespiteQuery, LayoutQuery
from service.api.operations import hearings, layouts
from service.api.own_pages import SAFE_METHODS
from service.api.posted import read_posted
from service.api.problems import ProblemError
from service.api.request_models import read_arguments, read_body
from service.download_names import ALL_FILES, SETTINGS, TUNE, NamedDisc, content_disposition, download_name
from service.limits import Limits
from service.media_types import JSON_MEDIA_TYPE, MEDIA_TYPES, MIDI_MEDIA_TYPE
from service.parts import Parts

NOT_MODIFIED = 304
FINGERPRINT = re.compile(r"[0-9a-f]{16}")
# What a POST can answer with, by media type; the first where the client does not mind.
ANSWERS: dict[str, str | None] = {
    JSON_MEDIA_TYPE: None,
    "image/svg+xml": "disc.svg",
    "image/vnd.dxf": "disc.dxf",
    ZIP_MEDIA_TYPE: ALL_FILES,
}
# The same for several discs, of which no one drawing is the answer.
ANSWERS_FOR_SEVERAL: dict[str, str | None] = {JSON_MEDIA_TYPE: None, ZIP_MEDIA_TYPE: ALL_FILES}


def layout_routes(desk: LayoutDesk, parts: Parts, shelf: HearingShelf) -> Blueprint:
    """The routes of layouts.

    Args:
        desk: Computes and keeps layouts.
        parts: Read for limits, and for the documents that owners keep.
        shelf: Keeps how they sound.
    """
    limits = parts.settings.limits
    routes = Blueprint("layouts", __name__, url_prefix="/v1/layouts")
    teller = LayoutTeller(desk, limits)

    def reason_asked() -> str | None:
        return read_arguments(request, DespiteQuery).despite_findings

    @routes.post("")
    @describes(layouts.MAKE)
    @open_on_loopback(Scope.ORDER)
    def make_layout() -> Response:
        _answer_wanted(request, 1)  # what is acceptable in no case is refused before anything is read
        query = read_arguments(request, LayoutQuery)
        inputs = read_posted(request, query, limits).kept_for(parts.store, _owner_id())
        file_name = _answer_wanted(request, inputs.read().settings.discs)
        response = teller.made(desk.lay_out_discs(inputs, _owner_id()), file_name, query.despite_findings)
        response.vary.add("Accept")
        return response

    @routes.get("/<fingerprint>")
    @describes(layouts.TELL)
    @open_on_loopback(Scope.ORDER)
    def tell_layout(fingerprint: str) -> Response:
        return _conditional(teller.layout(_found(desk, fingerprint), reason_asked()), request)

    @routes.get("/<fingerprint>/<file_name>")
    @describes(layouts.FILE)
    @open_on_loopback(Scope.ORDER)
    def give_file(fingerprint: str, file_name: str) -> Response:
        if file_name not in FILES:
            raise _no_such_file(file_name, "a layout", FILES)
        kept = _found(desk, fingerprint)
        cutter = kept.inputs.read().cutter
        if file_name not in files_for(cutter):
            raise _no_such_file(file_name, f"a layout for {cutter.id}, a {cutter.kind},", files_for(cutter))
        return _conditional(teller.file(kept, file_name, reason_asked()), request)

    _add_what_was_brought(routes, desk, teller, limits)
    _add_hearings(routes, desk, shelf)
    return routes


def _add_what_was_brought(routes: Blueprint, desk: LayoutDesk, teller: "LayoutTeller", limits: Limits) -> None:
    @routes.get("/<fingerprint>/settings.json")
    @describes(layouts.SETTINGS)
    @open_on_loopback(Scope.ORDER)
    def give_settings(fingerprint: str) -> Response:
        kept = _found_any(desk, fingerprint)
        return _brought(kept, (SETTINGS, kept.inputs.settings, JSON_MEDIA_TYPE), request)

    @routes.get("/<fingerprint>/tune.mid")
    @describes(layouts.TUNE)
    @open_on_loopback(Scope.ORDER)
    def give_tune(fingerprint: str) -> Response:
        kept = _found_any(desk, fingerprint)
        return _brought(kept, (TUNE, kept.inputs.tune, MIDI_MEDIA_TYPE), request)

    @routes.post("/<fingerprint>/again")
    @describes(layouts.AGAIN)
    @open_on_loopback(Scope.ORDER)
    def make_again(fingerprint: str) -> Response:
        reason = read_arguments(request, DespiteQuery).despite_findings
        kept = _found_any(desk, fingerprint)
        asked = read_body(request, Settings, document="settings", most_bytes=limits.document_bytes)
        inputs = replace(kept.inputs, settings=asked.model_dump_json(exclude_unset=True).encode())
        return teller.made(desk.lay_out_discs(inputs, _owner_id()), None, reason)


def _add_hearings(routes: Blueprint, desk: LayoutDesk, shelf: HearingShelf) -> None:
    @routes.get("/<fingerprint>/hearing.wav")
    @describes(hearings.LAYOUT_SOUND)
    @open_on_loopback(Scope.ORDER)
    def give_sound(fingerprint: str) -> Response:
        return sound_response(shelf, _heard(_found(desk, fingerprint)), request)

    @routes.get("/<fingerprint>/hearing.mid")
    @describes(hearings.LAYOUT_PLUCKS)
    @open_on_loopback(Scope.ORDER)
    def give_plucks(fingerprint: str) -> Response:
        return plucks_response(shelf, _heard(_found(desk, fingerprint)), request)


class LayoutTeller:
    """Tells layouts and gives their files, as they were made or marked NOT GOOD TO CUT."""

    def __init__(self, desk: LayoutDesk, limits: Limits) -> None:
        self._desk = desk
        self._limits = limits

    def address(self, kept: KeptLayout, file_name: str | None, reason: str | None) -> str:
        """The path of a layout, or of one of its files, on the service; it carries the reason on."""
        path = f"/v1/layouts/{kept.fingerprint}" + (f"/{file_name}" if file_name else "")
        return path if kept.good_to_cut or reason is None else f"{path}?{urlencode({'despite_findings': reason})}"

    def made(self, discs: Sequence[KeptLayout], file_name: str | None, reason: str | None) -> Response:
        """The answer to a POST: what was made, or one of its files.

        Args:
            discs: The layouts made, one or several.
            file_name: The file it is answered with; None for the layouts in JSON.
            reason: Why cutting files shall be given although an error-level finding stands, or None.

        Raises:
            ProblemError: A cutting file is part of the answer, an error-level finding stands, and no reason is given.
        """
        if file_name == ALL_FILES:
            return self.all_files(discs, reason)
        if file_name is not None:
            response = self.file(discs[0], file_name, reason)
            response.headers["Content-Location"] = self.address(discs[0], file_name, reason)
            return response
        if len(discs) == 1:
            response = self.layout(discs[0], reason)
            response.headers["Location"] = self.address(discs[0], None, reason)
        else:
            told = {"discs": [self._told(kept, reason) for kept in discs]}
            response = json_bytes_response(json_bytes_of_read(told))
            for kept in discs:  # each is a resource of its own: a list has several items (RFC 6573), no one location
                response.headers.add("Link", f'<{self.address(kept, None, reason)}>; rel="item"')
        response.status_code = 201
        return response

    def all_files(self, discs: Sequence[KeptLayout], reason: str | None) -> Response:
        """Every file of these layouts in one archive, under the names they are saved by, in a folder for each disc.

        Raises:
            ProblemError: An error-level finding stands on a disc, and no reason is given.
        """
        packed: dict[str, bytes] = {}
        for kept in discs:
            if reason is None and not kept.good_to_cut:
                raise _kept_back(kept, CUTTING_FILES[0])
            named = _named(kept, not_good=not kept.good_to_cut)
            for file_name, content in self._desk.files(kept, reason).items():
                packed[f"{kept.disc_number}/{download_name(named, file_name)}"] = content
        response = Response(archive_of(packed), content_type=ZIP_MEDIA_TYPE)
        first = _named(discs[0], not_good=not all(kept.good_to_cut for kept in discs))
        together = replace(first, part=f"{len(discs)} discs" if len(discs) > 1 else "")
        response.headers["Content-Disposition"] = content_disposition(together, ALL_FILES, how="attachment")
        response.headers["Cache-Control"] = "no-cache"
        return response

    def layout(self, kept: KeptLayout, reason: str | None) -> Response:
        """A layout in JSON, with links to the files that can be had; those kept back are left out.

        Nothing of it where the client says that it has it.
        """
        tag = self._tag(kept, "layout", reason)
        if _has_already(tag):
            response = json_bytes_response(b"", status=NOT_MODIFIED)
        else:
            response = json_bytes_response(json_bytes_of_read(self._told(kept, reason)))
        response.set_etag(tag)
        return response

    def _told(self, kept: KeptLayout, reason: str | None) -> dict[str, Any]:
        names = self._desk.names_given(kept, reason)
        return {
            "fingerprint": kept.fingerprint,
            "title": kept.title,
            "disc": {"number": kept.disc_number, "of": kept.disc_count},
            "good_to_cut": kept.good_to_cut,
            "links": {name: self.address(kept, name, reason) for name in names}
            | {name: self.address(kept, name, None) for name in HEARING_FILES},
            "layout": json.loads(self._desk.told(kept, reason)["layout.json"]),
        }

    def file(self, kept: KeptLayout, file_name: str, reason: str | None) -> Response:
        """One of a layout's files, made if it was not yet; nothing of it where the client says that it has it.

        Raises:
            ProblemError: It is a cutting file, and an error-level finding stands, and no reason is given; or it cannot
                be made again.
        """
        marked = reason is not None and not kept.good_to_cut
        if file_name in CUTTING_FILES and not kept.good_to_cut and not marked:
            raise _kept_back(kept, file_name)
        tag = self._tag(kept, file_name, reason)
        is_picture = file_name == "disc.svg"
        if _has_already(tag):
            response = Response(status=NOT_MODIFIED, content_type=MEDIA_TYPES[file_name])
        else:
            response = Response(self._content(kept, file_name, reason), content_type=MEDIA_TYPES[file_name])
            # Not of 304, which tells of a file no more than a client's cache has to know (RFC 9110 section 15.4.5).
            response.headers["Content-Disposition"] = content_disposition(
                _named(kept, not_good=marked), file_name, how="inline" if is_picture else "attachment"
            )
        if is_picture:  # of 304 too, for a cache takes over the fields that it has
            response.headers["Content-Security-Policy"] = ONLY_OWN_STYLES
        # Of one disc all the while, though another version of the program may draw it otherwise: not immutable.
        age = "no-cache" if kept.stopped_by_time else f"max-age={self._limits.file_max_age_s}"
        response.headers["Cache-Control"] = f"private, {age}"
        response.set_etag(tag)
        return response

    def _content(self, kept: KeptLayout, file_name: str, reason: str | None) -> bytes:
        files = self._desk.told if file_name in TOLD_FILES else self._desk.files
        return files(kept, reason)[file_name]

    def _tag(self, kept: KeptLayout, what: str, reason: str | None) -> str:
        mark = "" if kept.good_to_cut or reason is None else "-" + hashlib.sha256(reason.encode()).hexdigest()[:16]
        if kept.stopped_by_time:  # let go and searched for again, it may be another disc under the same fingerprint
            mark += "-" + hashlib.sha256(kept.files["layout.json"]).hexdigest()[:16]
        return f"{kept.fingerprint}-{self._desk.program}-{what}{mark}"


def _has_already(tag: str) -> bool:
    """Whether the client says that it has what it reads: it is answered 304 then, with a head alone.

    A tune that is posted is answered whole, whatever the client has.
    """
    is_read = request.method in SAFE_METHODS and matches(tag, request)
    return is_read and request.if_none_match.contains_weak(tag)


def _conditional(response: Response, asked: Request) -> Response:
    """What is read, as its conditions have it: 304 where it is known already that the client has it."""
    return response if response.status_code == NOT_MODIFIED else conditional(response, asked)


def _brought(kept: KeptLayout, file: tuple[str, bytes, str], asked: Request) -> Response:
    """What a layout was made from: a file as it was brought, by its name, content and media type."""
    name, content, media_type = file
    response = Response(content, content_type=media_type)
    named = _named(kept, not_good=False)
    response.headers["Content-Disposition"] = content_disposition(named, name, how="attachment")
    response.headers["Cache-Control"] = "private, no-cache"
    response.add_etag()
    return conditional(response, asked)


def _heard(kept: KeptLayout) -> Heard:
    name = download_name(_named(kept, not_good=False), "layout.json")
    return Heard(layout_json=kept.files["layout.json"], movement=kept.inputs.read().movement, layout_name=name)


def _named(kept: KeptLayout, *, not_good: bool) -> NamedDisc:
    read = kept.inputs.read()
    return NamedDisc(
        title=kept.title,
        movement=read.movement,
        cutter=read.cutter,
        fingerprint=kept.fingerprint,
        not_good=not_good,
        part=kept.part,
    )


def _answer_wanted(asked: Request, disc_count: int) -> str | None:
    """The file that a POST for so many discs shall be answered with; None for the layouts in JSON."""
    if not asked.headers.get("Accept", "").strip():
        return None
    answers = ANSWERS if disc_count == 1 else ANSWERS_FOR_SEVERAL
    best = asked.accept_mimetypes.best_match(answers)
    if best is None:
        why = "" if disc_count == 1 else f"; a drawing shows one disc of the {disc_count}, and the JSON links to each"
        raise ProblemError(
            name="not-acceptable",
            detail=f"Accept is {asked.headers['Accept'][:200]!r}; the answer can be {', '.join(answers)}{why}",
            more={"allowed_types": list(answers)},
        )
    return answers[best]


def _owner_id() -> str | None:
    asker = asker_or_none()
    return None if asker is None else asker.owner_id


def _found(desk: LayoutDesk, fingerprint: str) -> KeptLayout:
    return _known(fingerprint, lambda: desk.find(fingerprint, _owner_id()))


def _found_any(desk: LayoutDesk, fingerprint: str) -> KeptLayout:
    """The same, also of an earlier version of the program: what it was made from is there, and its files are not."""
    return _known(fingerprint, lambda: desk.find_any(fingerprint, _owner_id())[0])


def _known(fingerprint: str, find: Callable[[], KeptLayout | None]) -> KeptLayout:
    kept = find() if FINGERPRINT.fullmatch(fingerprint) else None
    if kept is None:
        raise ProblemError(
            name="layout-unknown",
            detail=f"no layout is kept under {fingerprint[:64]!r}; post the tune again: "
            "the same input gives the same layout and the same fingerprint",
        )
    return kept


def _no_such_file(file_name: str, owner: str, known: Sequence[str]) -> ProblemError:
    return ProblemError(
        name="route-unknown",
        detail=f"{owner} has no file called {file_name!r}; it has {', '.join(known)}",
        more={"known_files": list(known)},
    )


def _kept_back(kept: KeptLayout, file_name: str) -> ProblemError:
    findings = json.loads(kept.files["layout.json"])["findings"]
    errors = [finding for finding in findings if finding["level"] == "error"]
    of_set = f"{kept.part}: " if kept.part else ""
    return ProblemError(
        name="not-good-to-cut",
        detail=f"{of_set}{file_name} is kept back: {len(errors)} error(s), the first: {errors[0]['message']}",
        more={"fingerprint": kept.fingerprint, "findings": findings},
    )
