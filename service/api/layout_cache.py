"""Layouts kept for their links: a bounded folder that all workers of the service share.

A layout is one file, a ZIP archive of its inputs and its files. It is written beside its name and then
renamed, so that no worker ever sees half of one; a layout that told of itself alone gets its files in the same way.
A look at a layout renews the time of its file; where there are too many, the oldest go. The file's name holds a
digest of the program, so that another version never gives out files that an earlier one made, and one of the owner:
what was laid out for one is not there for another.
"""

import contextlib
import hashlib
import io
import json
import logging
import os
import stat
import tempfile
import time
import zipfile
import zlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path

from layout.file_names import TOLD_FILES
from service.documents import Inputs, Shipped, Source, Written
from service.settings import ServiceSettings, SettingsError
from service.store.faults import StoreFullError
from service.store.files import NO_ROOM

log = logging.getLogger("discwright")

SUFFIX = ".zip"
# What a damaged archive raises; RuntimeError where it seems to be encrypted, or of another version.
DAMAGED = (zipfile.BadZipFile, zlib.error, EOFError, RuntimeError, KeyError, ValueError)
PACKED_LEVEL = 1  # of 9: as quick as it gets; 13 % larger than by 6, which takes four times as long
PART_SUFFIX = ".part"
OWNER_ONLY = 0o700
AT_HAND = 16  # layouts that a process keeps unpacked: about half a megabyte each; they are asked for again and again
RENEWED_AFTER_S = 1.0  # s; so finely is known which was looked at last, so that not every look writes to the disk
DIGITS = 8  # of the program's digest in a name


@dataclass(frozen=True, slots=True, kw_only=True)
class KeptLayout:
    """A layout as it is kept.

    Attributes:
        fingerprint: Its id.
        title: The tune's.
        disc_number: Which disc of its set it is, from 1.
        disc_count: How many discs the tune is cut into.
        good_to_cut: Whether no error-level finding stands.
        inputs: What it was made from.
        files: Its files by name; TOLD_FILES alone until another is asked for.
        owner_id: Whose it is, and no other's to see; None for nobody's in particular.
    """

    fingerprint: str
    title: str
    disc_number: int
    disc_count: int
    good_to_cut: bool
    inputs: Inputs
    files: Mapping[str, bytes]
    owner_id: str | None = None

    @property
    def has_all_files(self) -> bool:
        """Whether its files are made, and not what it tells alone."""
        return not set(self.files) <= set(TOLD_FILES)

    @property
    def stopped_by_time(self) -> bool:
        """Whether time stopped the search for it, so that another search may come to another disc."""
        return _was_stopped_by_time(self.files["report.json"])

    @property
    def part(self) -> str:
        """Which disc of a set it is, such as "disc 2 of 3"; "" for one alone."""
        return "" if self.disc_count == 1 else f"disc {self.disc_number} of {self.disc_count}"


class LayoutCache:
    """The folder of kept layouts; any number of processes may use it at a time."""

    def __init__(self, settings: ServiceSettings) -> None:
        """Make the folder where it does not exist.

        Raises:
            SettingsError: The folder cannot be made or used.
        """
        self._folder = settings.cache_directory
        self._most_layouts = settings.limits.cache_layouts
        self._most_bytes = settings.limits.cache_bytes
        self._abandoned_s = settings.limits.abandoned_part_s
        self.program = program_digest()
        self._at_hand: dict[Path, tuple[_State, KeptLayout]] = {}  # the one asked for last at the end
        _make_own_folder(self._folder)

    def get(self, fingerprint: str, owner_id: str | None = None) -> KeptLayout | None:
        """The layout of a fingerprint that is an owner's, or None where none is kept.

        Args:
            fingerprint: Hex digits; checked by the caller, as it becomes a file name.
            owner_id: Whose; None for those that are nobody's in particular.
        """
        return self._read(self._path(fingerprint, owner_id))

    def earlier(self, fingerprint: str, owner_id: str | None = None) -> KeptLayout | None:
        """The layout that another version of the program kept under a fingerprint, the last of several; None for none.

        Args:
            fingerprint: As for `get`.
            owner_id: As for `get`.
        """
        found = []
        for path in self._folder.glob(self._name(fingerprint, "?" * DIGITS, owner_id)):
            with contextlib.suppress(FileNotFoundError):
                found.append((path.stat().st_mtime_ns, path))
        return self._read(max(found)[1]) if found else None

    def _read(self, path: Path) -> KeptLayout | None:
        try:
            state = _state_of(os.stat(path))
            known, layout = self._at_hand.pop(path, (None, None))
            if layout is None or known != state:
                with path.open("rb") as file:
                    state, layout = _state_of(os.fstat(file.fileno())), _unpacked(file.read())
        except FileNotFoundError:
            return None
        except DAMAGED as fault:
            log.warning("%s is damaged and removed: %s", path, fault)
            path.unlink(missing_ok=True)
            return None
        self._put_at_hand(path, _renewed(path, state), layout)
        return layout

    def _put_at_hand(self, path: Path, state: "_State", layout: KeptLayout) -> None:
        self._at_hand[path] = state, layout
        for oldest in list(self._at_hand)[:-AT_HAND]:
            self._at_hand.pop(oldest, None)  # another thread may have been before us

    def put(self, layout: KeptLayout) -> None:
        """Keep a layout, and let the least recently used go where there are too many.

        The layout just kept stays, whatever its size.

        Raises:
            StoreFullError: The disk is full.
            OSError: The folder was taken away.
        """
        packed = _packed(layout)
        with room_told():
            handle, part = tempfile.mkstemp(dir=self._folder, suffix=PART_SUFFIX)
            try:
                with os.fdopen(handle, "wb") as file:
                    file.write(packed)
                os.replace(part, self._path(layout.fingerprint, layout.owner_id))
            except BaseException:
                Path(part).unlink(missing_ok=True)
                raise
        self._let_go(keep=self._path(layout.fingerprint, layout.owner_id), taken_bytes=len(packed))

    def let_go(self, fingerprint: str, owner_id: str | None = None) -> None:
        """Keep a layout no longer; there need not be one."""
        self._path(fingerprint, owner_id).unlink(missing_ok=True)

    def _path(self, fingerprint: str, owner_id: str | None = None) -> Path:
        return self._folder / self._name(fingerprint, self.program, owner_id)

    @staticmethod
    def _name(fingerprint: str, program: str, owner_id: str | None) -> str:
        # A digest of the owner's id, which the folder's own user alone may list: no id becomes part of a path.
        whose = "" if owner_id is None else f"-{hashlib.sha256(owner_id.encode()).hexdigest()[:16]}"
        return f"{fingerprint}-{program}{whose}{SUFFIX}"

    def _let_go(self, keep: Path, taken_bytes: int) -> None:
        seen = []
        for path in self._folder.iterdir():
            try:
                known = path.stat()
            except FileNotFoundError:
                continue  # another worker let it go
            if path.suffix == PART_SUFFIX and known.st_mtime < time.time() - self._abandoned_s:
                path.unlink(missing_ok=True)
            elif path.suffix == SUFFIX and path != keep:
                seen.append((known.st_mtime_ns, path.name, known.st_size, path))
        count = 1  # the one just kept, even where another worker has let it go by now
        for _, _, size_bytes, path in sorted(seen, reverse=True):
            count += 1
            taken_bytes += size_bytes
            if count > self._most_layouts or taken_bytes > self._most_bytes:
                path.unlink(missing_ok=True)


@contextlib.contextmanager
def room_told() -> Iterator[None]:
    """Tell a full disk in our own words, as the store of files does; whatever else is raised goes on as it is.

    Raises:
        StoreFullError: There is no room.
    """
    try:
        yield
    except OSError as fault:
        if fault.errno not in NO_ROOM:
            raise
        raise StoreFullError("there is no room left in the folder of layouts") from fault


def program_digest() -> str:
    """Eight hex digits that name the code and the documents of the computation as they are installed."""
    digest = hashlib.sha256()
    for name, content in sorted(_sources(files("layout"), "")):
        digest.update(f"{name} {len(content)}\n".encode() + content)
    return digest.hexdigest()[:DIGITS]


def _sources(folder: Traversable, inside: str) -> list[tuple[str, bytes]]:
    found = []
    for entry in folder.iterdir():
        if entry.is_dir():
            found += _sources(entry, f"{inside}{entry.name}/")
        elif entry.name.endswith((".py", ".json")):
            found.append((inside + entry.name, entry.read_bytes()))
    return found


def _make_own_folder(folder: Path) -> None:
    advice = "set DISCWRIGHT_CACHE to a folder of your own"
    try:
        folder.mkdir(mode=OWNER_ONLY, parents=True, exist_ok=True)
        known = folder.lstat()
    except OSError as refusal:
        raise SettingsError(f"layouts cannot be kept in {folder} ({refusal.strerror}); {advice}") from refusal
    # In a folder for all users, someone else may have made this one first.
    others_write = known.st_mode & (stat.S_IWGRP | stat.S_IWOTH)
    if not stat.S_ISDIR(known.st_mode) or known.st_uid != os.getuid() or others_write:
        raise SettingsError(f"layouts cannot be kept in {folder}, which others own or may write to; {advice}")
    if not os.access(folder, os.W_OK | os.X_OK):
        raise SettingsError(f"layouts cannot be kept in {folder}, which cannot be written to; {advice}")


def _packed(layout: KeptLayout) -> bytes:
    inputs = layout.inputs
    about = {
        "fingerprint": layout.fingerprint,
        "title": layout.title,
        "disc_number": layout.disc_number,
        "disc_count": layout.disc_count,
        "good_to_cut": layout.good_to_cut,
        "owner_id": layout.owner_id,
        "movement": inputs.movement.id if isinstance(inputs.movement, Shipped) else None,
        "cutter": inputs.cutter.id if isinstance(inputs.cutter, Shipped) else None,
    }
    members = {"about.json": json.dumps(about).encode(), "tune.mid": inputs.tune, "settings.json": inputs.settings}
    for name, source in (("movement.json", inputs.movement), ("cutter.json", inputs.cutter)):
        if isinstance(source, Written):
            members[name] = source.text
    members |= {f"files/{name}": content for name, content in layout.files.items()}
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED, compresslevel=PACKED_LEVEL) as archive:
        for name, content in members.items():
            archive.writestr(name, content)
    return buffer.getvalue()


@dataclass(frozen=True, slots=True)
class _State:
    """By what a file is known to be the one that was read: another that takes its place has another number."""

    number: int
    size_bytes: int
    looked_at_ns: int


def _state_of(known: os.stat_result) -> _State:
    return _State(known.st_ino, known.st_size, known.st_mtime_ns)


def _renewed(path: Path, state: _State) -> _State:
    """The state of a file after a look at it."""
    now_ns = time.time_ns()
    if abs(now_ns - state.looked_at_ns) < RENEWED_AFTER_S * 1e9:
        return state
    with contextlib.suppress(FileNotFoundError):  # another worker has just let it go
        os.utime(path, ns=(now_ns, now_ns))
    return replace(state, looked_at_ns=now_ns)


@lru_cache(maxsize=AT_HAND)
def _was_stopped_by_time(report: bytes) -> bool:
    return bool(json.loads(report)["worth"]["stopped"] == "time")


def _unpacked(packed: bytes) -> KeptLayout:
    with zipfile.ZipFile(io.BytesIO(packed)) as archive:
        members = {name: archive.read(name) for name in archive.namelist()}
    about = json.loads(members["about.json"])

    def source(name: str) -> Source:
        return Written(text=members[f"{name}.json"]) if about[name] is None else Shipped(id=about[name])

    return KeptLayout(
        fingerprint=about["fingerprint"],
        title=about["title"],
        disc_number=about["disc_number"],
        disc_count=about["disc_count"],
        good_to_cut=about["good_to_cut"],
        owner_id=about["owner_id"],
        inputs=Inputs(
            tune=members["tune.mid"],
            movement=source("movement"),
            cutter=source("cutter"),
            settings=members["settings.json"],
        ),
        files={name.removeprefix("files/"): content for name, content in members.items() if name.startswith("files/")},
    )
