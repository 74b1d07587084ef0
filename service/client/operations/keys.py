"""Operations: keys. Written by generate.py from the API document; not to be changed by hand."""

from typing import cast

from service.client import shapes
from service.client.calling import Group, Query, place


class OfKeys(Group):
    """Operations: keys."""

    def list_keys(self, query: Query | None = None) -> shapes.KeysAnswer:
        """Keys, the oldest first."""
        path = "/v1/keys"
        return cast("shapes.KeysAnswer", self._caller.json("GET", path, query=query))

    def make_key(self, body: shapes.KeyBody) -> shapes.NewKeyAnswer:
        """Make a key."""
        path = "/v1/keys"
        return cast("shapes.NewKeyAnswer", self._caller.json("POST", path, body=body))

    def tell_key(self, key_id: str) -> shapes.KeyAnswer:
        """A key."""
        path = place("/v1/keys/{key_id}", {"key_id": key_id})
        return cast("shapes.KeyAnswer", self._caller.json("GET", path))

    def revoke_key(self, key_id: str) -> None:
        """Revoke a key."""
        path = place("/v1/keys/{key_id}", {"key_id": key_id})
        self._caller.send("DELETE", path)

    def tell_own_key(self) -> shapes.OwnKeyAnswer:
        """The key that asks."""
        path = "/v1/keys/me"
        return cast("shapes.OwnKeyAnswer", self._caller.json("GET", path))
