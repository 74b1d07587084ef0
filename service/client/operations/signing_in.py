"""Operations: signing in. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping

from service.client.calling import Answer, Fields, Group, place


class OfSigningIn(Group):
    """Operations: signing in."""

    def sign_in(self, fields: Mapping[str, str]) -> Answer:
        """Sign a browser in as a key."""
        path = "/sign-in"
        return self._caller.send("POST", path, body=Fields(fields))

    def sign_in_by_link(self, secret: str) -> Answer:
        """Sign a browser in by a link that works once."""
        path = place("/sign-in/{secret}", {"secret": secret})
        return self._caller.send("GET", path)

    def sign_out(self) -> Answer:
        """Sign a browser out."""
        path = "/sign-out"
        return self._caller.send("POST", path)
