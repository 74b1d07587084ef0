"""Ids of rows: a word, and 32 hex digits that begin with the time, so that new rows stand together."""

import secrets
from datetime import datetime

from service.store.columns import EPOCH, MICROSECOND

TIME_DIGITS = 14  # hex digits of microseconds since 1970: enough until the year 4253
RANDOM_BYTES = 9  # 72 random bits beside the microsecond: not to be guessed, and never met twice


def new_id(kind: str, now: datetime) -> str:
    """A new id, such as order_0642…: its kind can be told, its row cannot be guessed.

    Args:
        kind: A word in small letters.
        now: The moment; its microsecond leads the digits.
    """
    return f"{kind}_{(now - EPOCH) // MICROSECOND:0{TIME_DIGITS}x}{secrets.token_hex(RANDOM_BYTES)}"
