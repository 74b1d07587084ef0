"""Operations: proofs. Written by generate.py from the API document; not to be changed by hand."""

from typing import cast

from service.client import shapes
from service.client.calling import Answer, Group, Query, place


class OfProofs(Group):
    """Operations: proofs."""

    def show_proof(self, text: str) -> shapes.ProofAnswer:
        """What a proof shows."""
        path = place("/v1/proofs/{text}", {"text": text})
        return cast("shapes.ProofAnswer", self._caller.json("GET", path))

    def tell_proof_file(self, text: str, disc: int, name: str) -> Answer:
        """A file of a proof."""
        path = place("/v1/proofs/{text}/files/{disc}/{name}", {"text": text, "disc": disc, "name": name})
        return self._caller.send("GET", path)

    def tell_proof_plucks(self, text: str, disc: int, query: Query | None = None) -> Answer:
        """What a disc of a proof plays, as MIDI."""
        path = place("/v1/proofs/{text}/files/{disc}/hearing.mid", {"text": text, "disc": disc})
        return self._caller.send("GET", path, query=query)

    def tell_proof_sound(self, text: str, disc: int, query: Query | None = None) -> Answer:
        """A disc of a proof as it sounds."""
        path = place("/v1/proofs/{text}/files/{disc}/hearing.wav", {"text": text, "disc": disc})
        return self._caller.send("GET", path, query=query)

    def say_verdict(self, text: str, body: shapes.VerdictBody) -> shapes.VerdictAnswer:
        """Accept or decline a proof."""
        path = place("/v1/proofs/{text}/verdict", {"text": text})
        return cast("shapes.VerdictAnswer", self._caller.json("POST", path, body=body))
