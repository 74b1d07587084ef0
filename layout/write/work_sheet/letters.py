"""Any text in the letters that the PDF standard fonts have, so that none becomes an empty box.

ISO 32000-1, Annex D: the WinAnsi encoding holds the letters of Windows code page 1252.
"""

import unicodedata

from layout.mechanics.plain_letters import latin_like
from layout.write.plain_text import one_line

IN_OTHER_LETTERS = "(in letters this sheet cannot show: see layout.json)"
_UNKNOWN = "?"
_LIKE_SIGNS = str.maketrans({"\N{MINUS SIGN}": "-", "\N{NO-BREAK SPACE}": " ", "\N{NON-BREAKING HYPHEN}": "-"})


def printable(text: str) -> str:
    """The text on one line in letters of code page 1252; other accents are dropped, other letters become "?"."""
    plain = unicodedata.normalize("NFC", one_line(text)).translate(_LIKE_SIGNS)
    if plain.isascii():
        return plain
    return " ".join("".join(map(_shown, plain)).split())


def name_shown(text: str) -> str:
    """A name or title as `printable` has it; where more than half of it would be lost, words that say so."""
    shown = printable(text)
    lost = shown.count(_UNKNOWN) - text.count(_UNKNOWN)
    letters = [letter for letter in shown if letter != " "]
    return IN_OTHER_LETTERS if 2 * lost > len(letters) else shown


def _shown(letter: str) -> str:
    if _has_letter(letter):
        return letter
    if unicodedata.category(letter) in {"Mn", "Me", "Cf"}:  # accents that stand alone, and signs that are not seen
        return ""
    apart = [part for part in unicodedata.normalize("NFKD", letter) if unicodedata.category(part) != "Mn"]
    if apart and all(map(_has_letter, apart)):
        return "".join(apart)
    return latin_like(letter) or _UNKNOWN


def _has_letter(letter: str) -> bool:
    return letter.isprintable() and letter.encode("cp1252", errors="ignore") != b""
