"""Operations: hooks. Written by generate.py from the API document; not to be changed by hand."""

from typing import cast

from service.client import shapes
from service.client.calling import Group, Query, place


class OfHooks(Group):
    """Operations: hooks."""

    def tell_delivery(self, delivery_id: str) -> shapes.DeliveryAnswer:
        """A message, and what came of it."""
        path = place("/v1/deliveries/{delivery_id}", {"delivery_id": delivery_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("GET", path))

    def redeliver(self, delivery_id: str) -> shapes.DeliveryAnswer:
        """Send a message again."""
        path = place("/v1/deliveries/{delivery_id}/redeliver", {"delivery_id": delivery_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("POST", path))

    def list_event_types(self) -> shapes.EventTypesAnswer:
        """The types of messages."""
        path = "/v1/event-types"
        return cast("shapes.EventTypesAnswer", self._caller.json("GET", path))

    def list_hooks(self) -> shapes.HooksAnswer:
        """The hooks there are."""
        path = "/v1/hooks"
        return cast("shapes.HooksAnswer", self._caller.json("GET", path))

    def make_hook(self, body: shapes.HookBody) -> shapes.NewHookAnswer:
        """Make a hook."""
        path = "/v1/hooks"
        return cast("shapes.NewHookAnswer", self._caller.json("POST", path, body=body))

    def tell_hook(self, hook_id: str) -> shapes.HookAnswer:
        """A hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("GET", path))

    def change_hook(self, hook_id: str, body: shapes.HookPatch) -> shapes.HookAnswer:
        """Change a hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("PATCH", path, body=body))

    def delete_hook(self, hook_id: str) -> None:
        """Delete a hook."""
        path = place("/v1/hooks/{hook_id}", {"hook_id": hook_id})
        self._caller.send("DELETE", path)

    def list_deliveries(self, hook_id: str, query: Query | None = None) -> shapes.DeliveriesAnswer:
        """Messages to a hook, the newest first."""
        path = place("/v1/hooks/{hook_id}/deliveries", {"hook_id": hook_id})
        return cast("shapes.DeliveriesAnswer", self._caller.json("GET", path, query=query))

    def enable_hook(self, hook_id: str) -> shapes.HookAnswer:
        """Turn a hook on again."""
        path = place("/v1/hooks/{hook_id}/enable", {"hook_id": hook_id})
        return cast("shapes.HookAnswer", self._caller.json("POST", path))

    def replace_hook_secret(self, hook_id: str, body: shapes.SecretBody | None = None) -> shapes.NewHookAnswer:
        """Give a hook a new secret."""
        path = place("/v1/hooks/{hook_id}/secret", {"hook_id": hook_id})
        return cast("shapes.NewHookAnswer", self._caller.json("POST", path, body=body))

    def test_hook(self, hook_id: str) -> shapes.DeliveryAnswer:
        """Send a hook a test."""
        path = place("/v1/hooks/{hook_id}/test", {"hook_id": hook_id})
        return cast("shapes.DeliveryAnswer", self._caller.json("POST", path))
