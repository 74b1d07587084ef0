"""Operations: trial pieces. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any

from service.client.calling import Answer, Form, Group, Query


class OfTrialPieces(Group):
    """Operations: trial pieces."""

    def make_trial_piece(
        self,
        parts: Mapping[str, bytes | Mapping[str, Any]] | None = None,
        query: Query | None = None,
    ) -> Answer:
        """Make a trial piece of a movement and a cutter."""
        path = "/v1/trial-pieces"
        return self._caller.send("POST", path, body=None if parts is None else Form(parts), query=query)
