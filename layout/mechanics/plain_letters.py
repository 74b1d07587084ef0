"""Any text in printable ASCII, which is all that old DXF readers and the engraving font know."""

import re
import unicodedata

_UNKNOWN = "?"
_MOST_LETTERS_IN_ONE = 2  # ae, oe, ss, th; a longer name is no spelling
# What NFKD leaves whole, such as o with a stroke, says in its Unicode name which letters it is like.
_NAMED = re.compile(r"LATIN (SMALL|CAPITAL) (?:LETTER|LIGATURE) ([A-Z]{1,2}|[A-Z ]+?)(?: WITH .+)?")
_LETTERS_OF_NAMES = {"SHARP S": "SS", "DOTLESS I": "I", "DOTLESS J": "J", "ETH": "D", "THORN": "TH", "ENG": "NG"}
_LIKE_SIGNS = str.maketrans(
    dict.fromkeys("\N{LEFT SINGLE QUOTATION MARK}\N{RIGHT SINGLE QUOTATION MARK}", "'")
    | dict.fromkeys("\N{SINGLE LOW-9 QUOTATION MARK}\N{MODIFIER LETTER APOSTROPHE}\N{PRIME}", "'")
    | dict.fromkeys("\N{LEFT DOUBLE QUOTATION MARK}\N{RIGHT DOUBLE QUOTATION MARK}", '"')
    | dict.fromkeys("\N{DOUBLE LOW-9 QUOTATION MARK}«»", '"')
    | {"\N{MINUS SIGN}": "-", "\N{MULTIPLICATION SIGN}": "x", "\N{FRACTION SLASH}": "/"}
)


def plain_ascii(text: str) -> str:
    """The text in printable ASCII on one line, blanks made single.

    Accents are dropped; letters, dashes and quotation marks without accents to drop become those
    they are like; what has no like becomes "?".
    """
    return " ".join("".join(map(_plain, _apart(text))).split())


def is_mostly_lost(text: str) -> bool:
    """Whether more than half of the text's letters, blanks apart, have no like in ASCII."""
    letters = [letter for letter in _apart(text) if _plain(letter).strip()]
    lost = [letter for letter in letters if letter != _UNKNOWN and _plain(letter) == _UNKNOWN]
    return 2 * len(lost) > len(letters)


def _apart(text: str) -> str:
    """The text with its letters apart from their accents, and signs of print as a keyboard's."""
    return unicodedata.normalize("NFKD", text).translate(_LIKE_SIGNS)


def _plain(letter: str) -> str:
    kind = unicodedata.category(letter)
    if " " <= letter <= "~":
        return letter
    if letter.isspace() or kind in {"Cc", "Zl", "Zp"}:
        return " "
    if kind in {"Mn", "Me", "Cf"}:  # accents, and signs that are not seen
        return ""
    if kind == "Pd":
        return "-"
    return latin_like(letter) or _UNKNOWN


def latin_like(letter: str) -> str:
    """The one or two letters from A to Z that a Latin letter is like by its Unicode name, such as o for ø; else ""."""
    found = _NAMED.fullmatch(unicodedata.name(letter, ""))
    like = "" if found is None else _LETTERS_OF_NAMES.get(found[2], found[2])
    if found is None or len(like) > _MOST_LETTERS_IN_ONE:
        return ""
    return like.lower() if found[1] == "SMALL" else like.capitalize()
