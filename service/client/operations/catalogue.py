"""Operations: catalogue. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any, cast

from service.client import shapes
from service.client.calling import Group, Query, place


class OfCatalogue(Group):
    """Operations: catalogue."""

    def list_cutters(self, query: Query | None = None) -> shapes.CuttersAnswer:
        """The cutters there are."""
        path = "/v1/cutters"
        return cast("shapes.CuttersAnswer", self._caller.json("GET", path, query=query))

    def tell_cutter(self, document_id: str, query: Query | None = None) -> dict[str, Any]:
        """A cutter."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        return cast("dict[str, Any]", self._caller.json("GET", path, query=query))

    def save_cutter(self, document_id: str, body: dict[str, Any]) -> shapes.SavedAnswer:
        """Keep a cutter, or a new revision of it."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        return cast("shapes.SavedAnswer", self._caller.json("PUT", path, body=body))

    def withdraw_cutter(self, document_id: str) -> None:
        """Offer a cutter no more."""
        path = place("/v1/cutters/{document_id}", {"document_id": document_id})
        self._caller.send("DELETE", path)

    def list_revisions_of_cutter(self, document_id: str) -> shapes.RevisionsAnswer:
        """The revisions of a cutter."""
        path = place("/v1/cutters/{document_id}/revisions", {"document_id": document_id})
        return cast("shapes.RevisionsAnswer", self._caller.json("GET", path))

    def check_cutter(self, body: dict[str, Any]) -> shapes.CheckAnswer:
        """Check a cutter and keep nothing."""
        path = "/v1/cutters/check"
        return cast("shapes.CheckAnswer", self._caller.json("POST", path, body=body))

    def list_movements(self, query: Query | None = None) -> shapes.MovementsAnswer:
        """The movements there are."""
        path = "/v1/movements"
        return cast("shapes.MovementsAnswer", self._caller.json("GET", path, query=query))

    def tell_movement(self, document_id: str, query: Query | None = None) -> dict[str, Any]:
        """A movement."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        return cast("dict[str, Any]", self._caller.json("GET", path, query=query))

    def save_movement(self, document_id: str, body: dict[str, Any]) -> shapes.SavedAnswer:
        """Keep a movement, or a new revision of it."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        return cast("shapes.SavedAnswer", self._caller.json("PUT", path, body=body))

    def withdraw_movement(self, document_id: str) -> None:
        """Offer a movement no more."""
        path = place("/v1/movements/{document_id}", {"document_id": document_id})
        self._caller.send("DELETE", path)

    def list_revisions_of_movement(self, document_id: str) -> shapes.RevisionsAnswer:
        """The revisions of a movement."""
        path = place("/v1/movements/{document_id}/revisions", {"document_id": document_id})
        return cast("shapes.RevisionsAnswer", self._caller.json("GET", path))

    def check_movement(self, body: dict[str, Any]) -> shapes.CheckAnswer:
        """Check a movement and keep nothing."""
        path = "/v1/movements/check"
        return cast("shapes.CheckAnswer", self._caller.json("POST", path, body=body))
