"""Operations: quotes. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Form, Group, once, place


class OfQuotes(Group):
    """Operations: quotes."""

    def make_quote(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.QuoteAnswer:
        """Ask what an order would cost."""
        path = "/v1/quotes"
        return cast("shapes.QuoteAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def tell_quote(self, quote_id: str) -> shapes.QuoteAnswer:
        """A quote."""
        path = place("/v1/quotes/{quote_id}", {"quote_id": quote_id})
        return cast("shapes.QuoteAnswer", self._caller.json("GET", path))
