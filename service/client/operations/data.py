"""Operations: data. Written by generate.py from the API document; not to be changed by hand."""

from service.client.calling import Answer, Group, Query


class OfData(Group):
    """Operations: data."""

    def export_owner(self, query: Query | None = None) -> Answer:
        """All that is kept of one owner."""
        path = "/v1/export"
        return self._caller.send("GET", path, query=query)
