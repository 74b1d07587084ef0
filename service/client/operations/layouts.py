"""Operations: layouts. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Answer, Form, Group, Query, place


class OfLayouts(Group):
    """Operations: layouts."""

    def make_layout(self, parts: Mapping[str, bytes | Mapping[str, Any]], query: Query | None = None) -> Answer:
        """Make a layout of a tune."""
        path = "/v1/layouts"
        return self._caller.send("POST", path, body=Form(parts), query=query)

    def tell_layout(self, fingerprint: str, query: Query | None = None) -> shapes.LayoutAnswer:
        """A layout that is kept."""
        path = place("/v1/layouts/{fingerprint}", {"fingerprint": fingerprint})
        return cast("shapes.LayoutAnswer", self._caller.json("GET", path, query=query))

    def tell_layout_file(self, fingerprint: str, file_name: str, query: Query | None = None) -> Answer:
        """A file of a layout."""
        path = place("/v1/layouts/{fingerprint}/{file_name}", {"fingerprint": fingerprint, "file_name": file_name})
        return self._caller.send("GET", path, query=query)

    def make_layout_again(
        self,
        fingerprint: str,
        body: dict[str, Any],
        query: Query | None = None,
    ) -> shapes.MadeAnswer:
        """Lay a kept layout out again with other settings."""
        path = place("/v1/layouts/{fingerprint}/again", {"fingerprint": fingerprint})
        return cast("shapes.MadeAnswer", self._caller.json("POST", path, body=body, query=query))

    def tell_layout_plucks(self, fingerprint: str, query: Query | None = None) -> Answer:
        """What a layout plays, as MIDI."""
        path = place("/v1/layouts/{fingerprint}/hearing.mid", {"fingerprint": fingerprint})
        return self._caller.send("GET", path, query=query)

    def tell_layout_sound(self, fingerprint: str, query: Query | None = None) -> Answer:
        """A layout as it sounds."""
        path = place("/v1/layouts/{fingerprint}/hearing.wav", {"fingerprint": fingerprint})
        return self._caller.send("GET", path, query=query)

    def tell_layout_settings(self, fingerprint: str) -> dict[str, Any]:
        """The settings a layout was made with."""
        path = place("/v1/layouts/{fingerprint}/settings.json", {"fingerprint": fingerprint})
        return cast("dict[str, Any]", self._caller.json("GET", path))

    def tell_layout_tune(self, fingerprint: str) -> Answer:
        """The tune a layout was made from."""
        path = place("/v1/layouts/{fingerprint}/tune.mid", {"fingerprint": fingerprint})
        return self._caller.send("GET", path)
