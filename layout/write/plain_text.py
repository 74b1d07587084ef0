"""What a person typed, made fit for a file: no control characters, no half characters."""

import unicodedata

LEAST_ASTRAL = 0x10000  # the first character beyond four hexadecimal digits
MOST_ASCII = 0x7F
MOST_DXF_STRING = 255  # bytes; DXF reference: a 1000 group string of extended data
_REPLACEMENT = "\ufffd"


def one_line(text: str) -> str:
    """The text on one line: control characters and line breaks become spaces, runs of them one.

    Half a surrogate pair and the two code points XML 1.0 forbids become U+FFFD.
    """
    kept = []
    for character in text:
        kind = unicodedata.category(character)
        if kind == "Cc" or kind in {"Zl", "Zp"}:
            kept.append(" ")
        elif kind == "Cs" or character in "\ufffe\uffff":
            kept.append(_REPLACEMENT)
        else:
            kept.append(character)
    return " ".join("".join(kept).split())


def dxf_text(text: str, most_bytes: int | None = None) -> str:
    r"""The text on one line in ASCII, other characters as the DXF reference's `\U+XXXX`.

    That notation has four digits: characters beyond it become U+FFFD.

    Args:
        text: Any text.
        most_bytes: Cut after this many bytes, never inside a character; None for no limit.
    """
    parts: list[str] = []
    length = 0
    for character in one_line(text):
        code = ord(character)
        part = character if code <= MOST_ASCII else f"\\U+{code if code < LEAST_ASTRAL else ord(_REPLACEMENT):04X}"
        length += len(part)
        if most_bytes is not None and length > most_bytes:
            break
        parts.append(part)
    return "".join(parts)
