"""Signatures of messages to hooks, as Standard Webhooks 1.0.0 says, and how a receiver checks them.

Signed is `{id}.{timestamp}.{body}` with HMAC-SHA256; the header holds `v1,` and the signature in base64, one for
each secret that is valid at the time, with spaces between.
Source: the specification of Standard Webhooks 1.0.0, sections "Signature scheme" and "Webhook headers".
"""

import base64
import binascii
import hashlib
import hmac
import secrets
from collections.abc import Mapping, Sequence
from datetime import datetime, timedelta
from typing import Any

from service.limits import HOOK_LIMITS
from service.store.columns import EPOCH, MICROSECOND

SECRET_PREFIX = "whsec_"
SECRET_BYTES = 32  # the specification allows 24 to 64
VERSION = "v1"  # HMAC-SHA256 with a secret that both sides hold


class SignatureError(Exception):
    """A message is not to be trusted; the text says why."""


def new_secret() -> str:
    """A new secret, as it is shown to the receiver: whsec_ and base64 of 32 random bytes."""
    return SECRET_PREFIX + base64.b64encode(secrets.token_bytes(SECRET_BYTES)).decode()


def signed_headers(message_id: str, body: bytes, *, at: datetime, valid_secrets: Sequence[str]) -> dict[str, str]:
    """The three header fields that make a message one of Standard Webhooks.

    Args:
        message_id: The same on every try; no dots.
        body: The bytes that are sent.
        at: The moment of this try; sent in whole seconds.
        valid_secrets: At least one; each signs.
    """
    timestamp = str((at - EPOCH) // timedelta(seconds=1))
    signatures = [f"{VERSION},{_signature(secret, message_id, timestamp, body)}" for secret in valid_secrets]
    return {"webhook-id": message_id, "webhook-timestamp": timestamp, "webhook-signature": " ".join(signatures)}


def verify(headers: Mapping[str, str], body: bytes, *, secret: str, now: datetime) -> None:
    """See that a message comes from who holds the secret, and now.

    Args:
        headers: Their names in small letters.
        body: The bytes as they came, not parsed and written again.
        secret: As it was shown.
        now: The receiver's time.

    Raises:
        SignatureError: A header is missing, the time is more than five minutes off, or no signature fits.
    """
    missing = [name for name in ("webhook-id", "webhook-timestamp", "webhook-signature") if not headers.get(name)]
    if missing:
        raise SignatureError(f"the message has no {missing[0]}")
    message_id, timestamp = headers["webhook-id"], headers["webhook-timestamp"]
    if not (timestamp.isascii() and timestamp.isdigit()):
        raise SignatureError(f"the webhook-timestamp is {timestamp!r}, not seconds since 1970")
    off_s = abs(int(timestamp) - (now - EPOCH) // timedelta(seconds=1))
    if off_s > HOOK_LIMITS.tolerance_s:
        raise SignatureError(
            f"the webhook-timestamp is {off_s} s from now; at most {HOOK_LIMITS.tolerance_s} s are taken"
        )
    wanted = _signature(secret, message_id, timestamp, body).encode()
    for one in headers["webhook-signature"].split(" "):
        version, _, signature = one.partition(",")
        if version == VERSION and hmac.compare_digest(wanted, signature.encode()):
            return
    raise SignatureError("no signature of the message fits the secret")


def first_secrets() -> dict[str, Any]:
    """What a new hook keeps of its secrets."""
    return {"current": new_secret(), "before": []}


def rotated(kept: Mapping[str, Any], *, now: datetime, old_valid_until: datetime) -> dict[str, Any]:
    """What a hook keeps of its secrets after it got a new one.

    Every older secret keeps its own end, so that asking twice (an answer may be lost) cuts no receiver off.

    Args:
        kept: What it kept before.
        now: Secrets that ended before are dropped.
        old_valid_until: Until when the one that was current signs as well; not after `now` drops it at once.
    """
    before = [{"secret": kept["current"], "until": (old_valid_until - EPOCH) // MICROSECOND}, *kept["before"]]
    valid = [one for one in before if one["until"] > (now - EPOCH) // MICROSECOND]
    return {"current": new_secret(), "before": valid[: HOOK_LIMITS.secrets_before]}


def valid_secrets(kept: Mapping[str, Any], *, now: datetime) -> tuple[str, ...]:
    """The secrets that sign now: the current one, then those it replaced a short while ago."""
    before = [one["secret"] for one in kept["before"] if one["until"] > (now - EPOCH) // MICROSECOND]
    return (kept["current"], *before)


def _signature(secret: str, message_id: str, timestamp: str, body: bytes) -> str:
    try:
        key = base64.b64decode(secret.removeprefix(SECRET_PREFIX), validate=True)
    except binascii.Error as fault:
        raise SignatureError("the secret is not whsec_ and base64") from fault
    signed = f"{message_id}.{timestamp}.".encode() + body
    return base64.b64encode(hmac.new(key, signed, hashlib.sha256).digest()).decode()
