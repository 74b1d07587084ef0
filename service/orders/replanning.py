"""What an order asks for anew: read and kept before the order is changed."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from layout.documents import read_settings
from service.access.asker import Asker
from service.computation import check_tune
from service.orders.faults import InputRefusedError, StateForbidsError
from service.orders.finding import order_row
from service.store.documents import document_in_force
from service.store.holds import FileKeeper
from service.store.store import Store


@dataclass(frozen=True, slots=True, kw_only=True)
class AskedAnew:
    """What is asked for anew; None stays as it was.

    Attributes:
        movement_revision: A revision of the order's movement.
        settings: The settings document's text, valid.
        most_lost_share: As in `AskedOrder`.
    """

    movement_revision: int | None = None
    settings: bytes | None = None
    most_lost_share: float | None = None


def columns_of(store: Store, keeper: FileKeeper, asker: Asker, order_id: str, anew: AskedAnew) -> Mapping[str, Any]:
    """The columns of the order that change, their documents kept; `replan_order` holds them when it changes the order.

    Raises:
        OrderUnknownError: There is no such order for the asker.
        StateForbidsError: Its tune was deleted.
        InputRefusedError: There is no such revision.
        MidiReadError: The tune does not have the sequence that the settings ask for.
    """
    with store.reading() as session:
        order = order_row(session, asker, order_id)
        if not order.tune_digest:  # else what is kept here would be held for an order that was deleted
            raise StateForbidsError("the order's tune was deleted; order again with the tune")
        owner_id, movement_id, tune_digest = order.owner_id, order.movement_id, order.tune_digest
        movement = None
        if anew.movement_revision is not None:
            movement = document_in_force(session, owner_id, "movement", movement_id, revision=anew.movement_revision)
            if movement is None:
                raise InputRefusedError(
                    "/movement_revision", f"there is no revision {anew.movement_revision} of {movement_id}"
                )
    if anew.settings is not None and tune_digest:
        check_tune(keeper.read(tune_digest), read_settings(anew.settings))
    texts = {
        "movement_digest": None if movement is None else movement.text,
        "settings_digest": anew.settings,
    }
    given = {name: text for name, text in texts.items() if text is not None}
    digests = dict(zip(given, keeper.keep(list(given.values())), strict=True))
    columns: dict[str, Any] = dict(digests)
    if movement is not None:
        columns["movement_revision"] = movement.revision
    if anew.most_lost_share is not None:
        columns["most_lost_share"] = anew.most_lost_share
    return columns
