"""MIDI files written out by hand: bytes in hexadecimal, a comment per line."""


def from_hexdump(text: str) -> bytes:
    """The bytes of a hexdump; what follows a # on a line is a comment."""
    return bytes.fromhex("".join(line.partition("#")[0] for line in text.splitlines()))


def chunk(kind: bytes, body: bytes, *, byteorder: str = "big") -> bytes:
    """A chunk with its length."""
    length = len(body).to_bytes(4, "little" if byteorder == "little" else "big")
    return kind + length + body


def midi_file(*tracks: str | bytes, midi_format: int = 0, division: int = 96, count: int | None = None) -> bytes:
    """A file of tracks given as hexdumps or bytes, end-of-track included by the caller.

    The header counts them truly unless `count` says something else.
    """
    bodies = [from_hexdump(track) if isinstance(track, str) else track for track in tracks]
    fields = (midi_format, len(bodies) if count is None else count, division)
    header = b"".join(field.to_bytes(2, "big") for field in fields)
    return chunk(b"MThd", header) + b"".join(chunk(b"MTrk", body) for body in bodies)


def riff(*chunks: bytes, form: bytes = b"RMID") -> bytes:
    """A RIFF file of chunks that are already even in length."""
    return chunk(b"RIFF", form + b"".join(chunks), byteorder="little")
