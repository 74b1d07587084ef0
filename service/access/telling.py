"""Keys as they are told to programs, by the service and by the command."""

from typing import Any

from service.access.keys import KeyTold
from service.moments import moment_text


def key_told(key: KeyTold) -> dict[str, Any]:
    """A key as plain values; the secret is no part of it."""
    return {
        "id": key.id,
        "owner": {"id": key.owner.id, "title": key.owner.title, "is_shop": key.owner.is_shop},
        "title": key.title,
        "scopes": list(key.scopes),
        "is_test": key.is_test,
        "created_at": moment_text(key.created_at),
        "last_used_at": moment_text(key.last_used_at) if key.last_used_at else None,
        "revoked_at": moment_text(key.revoked_at) if key.revoked_at else None,
    }
