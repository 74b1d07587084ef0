"""Sounds kept as files: a bounded folder beside the kept layouts, so that parts of one are cheap to give.

A file's name holds a digest of the layout, so that its sounds can be found and removed; one of all that decides its
bytes, the program among it; and then the bytes' own. It is written beside its name and then renamed. Any number of
processes may use the folder; two that make the same at a time make the same bytes.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
import tempfile
import threading
import time
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO

from layout.documents import Movement
from service.api.computing_queue import computing_queue
from service.api.layout_cache import OWNER_ONLY, PART_SUFFIX, program_digest, room_told
from service.api.models.hearings import PlucksQuery, SoundQuery
from service.api.problems import ProblemError
from service.computation import hearing_asked, hearing_of, write_hearing
from service.settings import ServiceSettings

if TYPE_CHECKING:
    from layout.hearing_walk import Bits, Hearing

FOLDER = "hearings"
SUFFIX = ".sound"
DIGITS = 32  # of a digest in a name: 128 bits, which no chance repeats
PIECE_BYTES = 64 * 1024  # bytes read at a time; of no consequence


@dataclass(frozen=True, slots=True, kw_only=True)
class KeptSound:
    """A file of the shelf: its SHA-256 in hex digits, its size, and whether it was made for who asked just now."""

    digest: str
    byte_count: int
    is_new: bool = False


class _Hashing:
    """A file that is written from its beginning to its end, and hashed on the way."""

    def __init__(self, file: BinaryIO) -> None:
        """Begin; nothing is hashed yet."""
        self._file = file
        self.digest = hashlib.sha256()

    def write(self, content: bytes, /) -> int:
        """Write and hash what comes next."""
        self.digest.update(content)
        return self._file.write(content)


class HearingShelf:
    """Gives sounds, from the folder where it can."""

    def __init__(self, settings: ServiceSettings) -> None:
        """Name the folder; it is made when the first sound is kept.

        Args:
            settings: Read for places and limits.
        """
        self._folder = settings.cache_directory / FOLDER
        self._limits = settings.limits
        self._program = program_digest()
        self._making = threading.Lock()  # one at a time in a process: it takes a core for a second or two

    def sound(self, layout_json: bytes, movement: Movement, query: PlucksQuery) -> KeptSound:
        """A layout as sound or, where no bits are asked for, as MIDI; made where it is not kept.

        Args:
            layout_json: The layout.
            movement: Its movement.
            query: How it is heard; a SoundQuery for WAV.

        Raises:
            DocumentError: A turn of a winding is asked for that the movement does not state.
            ProblemError: It would be longer than is made.
            StoreFullError: The disk is full.
            OSError: The folder was taken away.
        """
        key = self._key(layout_json, movement, query)
        found = self._found(key)
        if found is None:
            with computing_queue().place(), self._making:
                found = self._found(key)
                if found is None:
                    with computing_queue().admitted():
                        found = self._made(key, layout_json, movement, query)
        return found

    def chunks(self, digest: str, *, start: int = 0, end: int | None = None) -> Iterator[bytes]:
        """A sound in pieces, from byte `start` up to but without `end`; opened at once, read as it is asked for.

        Raises:
            FileNotFoundError: It was let go since.
        """
        [path] = list(self._folder.glob(f"*-{digest}{SUFFIX}"))[:1] or [self._folder / f"{digest}{SUFFIX}"]
        return _pieces(path.open("rb"), start, end)

    def forget(self, layout_digests: Iterable[str]) -> None:
        """Remove every sound of these layouts.

        Args:
            layout_digests: The SHA-256 of each layout's JSON, in hex digits.
        """
        for digest in layout_digests:
            for path in self._folder.glob(f"{digest[:DIGITS]}-*{SUFFIX}"):
                path.unlink(missing_ok=True)

    def _key(self, layout_json: bytes, movement: Movement, query: PlucksQuery) -> str:
        parts = {
            "program": self._program,
            "movement": movement.model_dump(mode="json"),
            "kind": type(query).__name__,
            "query": query.model_dump(mode="json"),
        }
        how = hashlib.sha256(json.dumps(parts, sort_keys=True).encode()).hexdigest()
        return f"{hashlib.sha256(layout_json).hexdigest()[:DIGITS]}-{how[:DIGITS]}"

    def _found(self, key: str) -> KeptSound | None:
        for path in self._folder.glob(f"{key}-*{SUFFIX}"):
            with contextlib.suppress(FileNotFoundError):  # another process has just let it go
                os.utime(path)
                return KeptSound(digest=_digest_in(path), byte_count=path.stat().st_size)
        return None

    def _made(self, key: str, layout_json: bytes, movement: Movement, query: PlucksQuery) -> KeptSound:
        hearing = hearing_of(layout_json, movement, hearing_asked(query.of, query.turn))
        bits: Bits | None = None if not isinstance(query, SoundQuery) else 16 if query.bits == "16" else 24
        most_s = self._limits.hearing_s
        if bits is not None and hearing.length_s > most_s:
            raise ProblemError(
                name="hearing-too-long",
                detail=f"it would sound for {hearing.length_s:.0f} s, and {most_s} s are made at most",
                more={"most_s": most_s},
            )
        with room_told():
            kept = self._written(key, hearing, bits)
        self._let_go(kept)
        return KeptSound(digest=_digest_in(kept), byte_count=kept.stat().st_size, is_new=True)

    def _written(self, key: str, hearing: Hearing, bits: Bits | None) -> Path:
        self._folder.mkdir(mode=OWNER_ONLY, parents=True, exist_ok=True)
        handle, part = tempfile.mkstemp(dir=self._folder, suffix=PART_SUFFIX)
        try:
            with os.fdopen(handle, "wb") as file:
                hashing = _Hashing(file)
                write_hearing(hearing, hashing, bits)
            kept = self._folder / f"{key}-{hashing.digest.hexdigest()}{SUFFIX}"
            os.replace(part, kept)
        except BaseException:
            Path(part).unlink(missing_ok=True)
            raise
        return kept

    def _let_go(self, keep: Path) -> None:
        """Remove what nobody has heard for long, the least recent where all are too large, and abandoned parts."""
        seen = []
        for path in self._folder.iterdir():
            with contextlib.suppress(FileNotFoundError):
                known = path.stat()
                if path.suffix == SUFFIX and known.st_mtime >= time.time() - self._limits.hearing_kept_s:
                    seen.append((path == keep, known.st_mtime_ns, path.name, known.st_size, path))
                elif path.suffix == SUFFIX or known.st_mtime < time.time() - self._limits.abandoned_part_s:
                    path.unlink(missing_ok=True)
        taken_bytes = 0
        for is_kept, _, _, size_bytes, path in sorted(seen, reverse=True):
            taken_bytes += size_bytes
            if taken_bytes > self._limits.hearing_bytes and not is_kept:
                path.unlink(missing_ok=True)


def _digest_in(path: Path) -> str:
    """The digest of a sound's bytes, from the name of its file."""
    return path.stem.rpartition("-")[2]


def _pieces(file: BinaryIO, start: int, end: int | None) -> Iterator[bytes]:
    with file:
        file.seek(start)
        left = None if end is None else end - start
        while left is None or left > 0:
            piece = file.read(PIECE_BYTES if left is None else min(PIECE_BYTES, left))
            if not piece:
                return
            left = None if left is None else left - len(piece)
            yield piece
