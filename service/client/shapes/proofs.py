"""What is sent and told: proofs. Written by generate.py from the API document; not to be changed by hand."""

from typing import NotRequired, TypedDict

from service.client.shapes.records import DocumentTold


class ProofAnswer(TypedDict):
    """What a proof shows."""

    reference: str | None
    title: str
    movement: "DocumentTold"
    revision: int
    waits_for_decision: bool
    discs: list["ProofDiscAnswer"]


class ProofDiscAnswer(TypedDict):
    """A disc as a proof shows it."""

    number: int
    of: int
    asked_count: int
    kept_count: int
    files: dict[str, str]


class VerdictAnswer(TypedDict):
    """What a customer said."""

    verdict: str
    revision: int


class VerdictBody(TypedDict):
    """Whether a customer accepts the disc as it was shown."""

    verdict: str
    by: str
    note: NotRequired[str | None]
