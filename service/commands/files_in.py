"""Files that a person names, read within limits; what is wrong with one is told in one line."""

from pathlib import Path

from layout.documents import Cutter, Movement, Settings, shipped_cutter_ids, shipped_movement_ids
from layout.errors import NotShippedError
from service.commands.errors import CommandError
from service.documents import Shipped, Source, Written, cutter_from, movement_from, settings_from_text
from service.limits import Limits


def read_file(path: Path, *, what: str, most_bytes: int) -> bytes:
    """The bytes of a file.

    Args:
        path: As the person named it.
        what: What the file should be, for the error's text.
        most_bytes: How large it may be.

    Raises:
        CommandError: It is missing, a folder, not readable, or too large.
    """
    try:
        with path.open("rb") as file:
            content = file.read(most_bytes + 1)
    except (OSError, ValueError) as refusal:  # ValueError: a null character in the path
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise CommandError(f"{what} {str(path)!r} cannot be read: {why}; check the path") from refusal
    if len(content) > most_bytes:
        raise CommandError(f"{what} {str(path)!r} is larger than {most_bytes} bytes, the most that is read")
    return content


def read_named_movement(named: str, limits: Limits) -> Movement:
    """The movement of an id or a file.

    Raises:
        CommandError: The file cannot be read.
        LayoutError: There is no such id, or the document is not valid.
    """
    return movement_from(_source(named, "movement", shipped_movement_ids(), limits))


def read_named_cutter(named: str | None, limits: Limits) -> Cutter:
    """The cutter of an id or a file; the default one for None.

    Raises:
        CommandError: The file cannot be read.
        LayoutError: There is no such id, or the document is not valid.
    """
    ids = shipped_cutter_ids()
    return cutter_from(_source(named or ids[0], "cutter", ids, limits))


def read_named_settings(path: Path | None, limits: Limits) -> Settings:
    """The settings of a file; the defaults for None.

    Raises:
        CommandError: The file cannot be read.
        LayoutError: The document is not valid.
    """
    if path is None:
        return Settings()
    return settings_from_text(read_file(path, what="settings", most_bytes=limits.document_bytes))


def _source(named: str, what: str, shipped_ids: tuple[str, ...], limits: Limits) -> Source:
    path = Path(named)
    if named in shipped_ids:
        return Shipped(id=named)
    if named.endswith(".json") or _is_there(path):
        return Written(text=read_file(path, what=what, most_bytes=limits.document_bytes))
    unknown = NotShippedError(document=what, document_id=named, known_ids=shipped_ids)
    raise CommandError(f"{unknown}; or give the path of a {what} document")


def _is_there(path: Path) -> bool:
    try:
        return path.exists()
    except (OSError, ValueError):
        return False
