"""What pages load beside their HTML: style sheets and scripts, served from here under a name that changes with them."""

import gzip
import hashlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from importlib.resources.abc import Traversable

MEDIA_TYPES = {
    ".css": "text/css; charset=utf-8",
    ".js": "text/javascript; charset=utf-8",
    ".svg": "image/svg+xml",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Asset:
    """A file that pages load.

    Attributes:
        content: Its bytes.
        packed: The same by gzip.
        media_type: What it is.
    """

    content: bytes
    packed: bytes
    media_type: str


@cache
def assets() -> Mapping[str, Asset]:
    """Every asset by its name, such as "js/disc.js"."""
    return {name: _asset(name, content) for name, content in sorted(_files(files("service.pages") / "assets", ""))}


@cache
def digest() -> str:
    """Twelve hex digits that change with any asset: part of every address, so that browsers may keep them for good."""
    whole = hashlib.sha256()
    for name, asset in assets().items():
        whole.update(f"{name} {len(asset.content)}\n".encode() + asset.content)
    return whole.hexdigest()[:12]


def address_of(name: str) -> str:
    """Where pages find an asset.

    Raises:
        KeyError: There is none of that name.
    """
    assets()[name]
    return f"/assets/{digest()}/{name}"


def _asset(name: str, content: bytes) -> Asset:
    ending = name[name.rindex(".") :]
    return Asset(content=content, packed=gzip.compress(content, 9, mtime=0), media_type=MEDIA_TYPES[ending])


def _files(folder: Traversable, inside: str) -> Iterator[tuple[str, bytes]]:
    for entry in folder.iterdir():
        if entry.is_dir():
            yield from _files(entry, f"{inside}{entry.name}/")
        elif entry.name.endswith(tuple(MEDIA_TYPES)):
            yield inside + entry.name, entry.read_bytes()
