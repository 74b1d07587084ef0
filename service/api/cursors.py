"""Cursors of lists: opaque to clients, signed so that nobody makes one up."""

from datetime import timedelta

from itsdangerous import BadSignature, URLSafeSerializer

from service.api.problems import ProblemError
from service.orders.finding import Place
from service.store.columns import EPOCH, MICROSECOND


class Cursors:
    """Makes and reads cursors."""

    def __init__(self, secret: bytes) -> None:
        self._signer = URLSafeSerializer(secret, salt="cursor")

    def make(self, place: Place) -> str:
        """The cursor of a place in a list."""
        return str(self._signer.dumps([(place.updated_at - EPOCH) // MICROSECOND, place.order_id]))

    def read(self, text: str) -> Place:
        """The place of a cursor.

        Raises:
            ProblemError: It was not made here.
        """
        try:
            moment, order_id = self._signer.loads(text)
        except BadSignature as fault:
            raise ProblemError(
                name="parameter-invalid",
                detail="after is no cursor of ours; follow the header Link of the page before, or leave after out",
                more={"parameter": "after"},
            ) from fault
        return Place(updated_at=EPOCH + timedelta(microseconds=moment), order_id=order_id)
