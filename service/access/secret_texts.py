"""Texts that open something, and what is kept of them.

A secret is 32 bytes from the system's random source: 256 bits, which no search goes through. So its SHA-256 is
kept as it is. A slow, salted hash is for passwords, which people choose and which can therefore be guessed; here it
would add nothing but time to every request.
"""

import base64
import hashlib
import re
import secrets

SECRET_BYTES = 32
KEY_PREFIX = "dw_"  # lets a person, or a search for leaked secrets, tell what it is
_KEY = re.compile(rf"{KEY_PREFIX}[A-Za-z0-9_-]{{43}}")  # 32 bytes in base64url (RFC 4648 section 5), unpadded


def new_key_secret() -> str:
    """The secret of a new key."""
    return KEY_PREFIX + new_secret()


def new_secret() -> str:
    """A secret of letters, digits, hyphens and underscores, fit to stand in a URL or a cookie."""
    return base64.urlsafe_b64encode(secrets.token_bytes(SECRET_BYTES)).rstrip(b"=").decode()


def could_be_key(text: str) -> bool:
    """Whether a text has the form of a key's secret."""
    return _KEY.fullmatch(text) is not None


def digest_of(secret: str) -> str:
    """What is kept of a secret: its SHA-256 in hex digits."""
    return hashlib.sha256(secret.encode("utf-8", "surrogatepass")).hexdigest()
