"""Operations: operations. Written by generate.py from the API document; not to be changed by hand."""

from typing import cast

from service.client import shapes
from service.client.calling import Answer, Group


class OfOperations(Group):
    """Operations: operations."""

    def tell_metrics(self) -> Answer:
        """How the service fares, as text for Prometheus."""
        path = "/metrics"
        return self._caller.send("GET", path)

    def tell_readiness(self) -> shapes.ReadyAnswer:
        """Whether the service can serve now."""
        path = "/readyz"
        return cast("shapes.ReadyAnswer", self._caller.json("GET", path))
