"""Proof links: signed, so that a customer who has one may see one plan of one order, and decide about it."""

import hashlib
from dataclasses import dataclass

from itsdangerous import BadSignature, SignatureExpired, URLSafeTimedSerializer

PURPOSE = "proof link"


class ProofRefusedError(Exception):
    """The link is none of ours, or too old; the text says which."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Proof:
    """What a link shows."""

    order_id: str
    revision: int


class ProofLinks:
    """Makes and reads the signed part of proof links."""

    def __init__(self, secret: bytes, *, days: int) -> None:
        """Get ready.

        Args:
            secret: For this purpose alone.
            days: How long a link holds.
        """
        self._signer = URLSafeTimedSerializer(secret, salt=PURPOSE, signer_kwargs={"digest_method": hashlib.sha256})
        self._most_age_s = days * 86_400

    def make(self, proof: Proof) -> str:
        """The signed part of a link."""
        return str(self._signer.dumps([proof.order_id, proof.revision]))

    def read(self, text: str) -> Proof:
        """What a link shows.

        Raises:
            ProofRefusedError: It was not made here, or is too old.
        """
        try:
            order_id, revision = self._signer.loads(text, max_age=self._most_age_s)
        except SignatureExpired as fault:
            raise ProofRefusedError("this link is too old; ask the shop for a new one") from fault
        except BadSignature as fault:
            raise ProofRefusedError("this is no link of ours; was it cut off?") from fault
        return Proof(order_id=order_id, revision=revision)
