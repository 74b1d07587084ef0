"""Operations: sheets. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any

from service.client.calling import Answer, Group


class OfSheets(Group):
    """Operations: sheets."""

    def plan_sheets(self, body: dict[str, Any]) -> Answer:
        """Lay discs on sheets of stock."""
        path = "/v1/sheets"
        return self._caller.send("POST", path, body=body)
