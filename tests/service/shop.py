"""A shop and its people for tests: owners, askers, and orders placed and planned without HTTP."""

import io
import zipfile
from dataclasses import replace
from pathlib import Path
from typing import Any

from layout import walk
from layout.arrange import Clock
from layout.documents import Cutter, Movement, Settings
from layout.write.laid_out import LaidOut
from service.access.asker import Asker
from service.access.scopes import Scope
from service.orders import taking
from service.orders.asked import AskedOrder, NamedDocument
from service.orders.deciding import Release, Seen, release_order
from service.orders.finding import find_order
from service.orders.placing import nothing_more, place_order
from service.orders.planned import OrderInputs, PlannedOrder
from service.orders.planning import plan_order
from service.orders.taking import Taken
from service.orders.views import OrderView
from service.parts import Parts
from service.store.columns import EPOCH
from service.store.holds import FileKeeper
from service.store.tables import Key, Owner

TUNE = (Path(__file__).parents[2] / "service" / "demo" / "tune.mid").read_bytes()
SHOP = Asker(
    key_id="key_shop",
    owner_id="owner_shop",
    title="the shop",
    is_shop=True,
    is_test=False,
    scopes=frozenset(Scope),
)
WEB_SHOP = replace(SHOP, key_id="key_web", owner_id="owner_web", title="a web shop", is_shop=False)
OTHER_SHOP = replace(WEB_SHOP, key_id="key_other", owner_id="owner_other", title="another web shop")
WEB_TESTS = replace(WEB_SHOP, key_id="key_tests", title="a web shop's tests", is_test=True)
ASKERS = (SHOP, WEB_SHOP, OTHER_SHOP, WEB_TESTS)

ASKED = AskedOrder(
    tune=TUNE,
    tune_name="turning-day.mid",
    movement=NamedDocument(id="fernhollow-31"),
    cutter=NamedDocument(id="fibre-laser"),
    reference="W-1001",
    most_lost_share=0.05,
)


def archive_of(**tunes: bytes) -> bytes:
    """A ZIP archive of tunes; each is called as its argument, with the ending of MIDI files."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in tunes.items():
            archive.writestr(f"{name}.mid", content)
    return out.getvalue()


def open_shop(parts: Parts) -> None:
    """Write down the owners and the keys of the askers."""
    with parts.store.writing() as session:
        for owner_id in dict.fromkeys(asker.owner_id for asker in ASKERS):
            is_shop = owner_id == SHOP.owner_id
            session.add(Owner(id=owner_id, title=owner_id, is_shop=is_shop, created_at=EPOCH))
        session.flush()
        for asker in ASKERS:
            session.add(
                Key(
                    id=asker.key_id,
                    owner_id=asker.owner_id,
                    title=asker.title,
                    secret_sha256=asker.key_id.ljust(64, "0"),
                    scopes=" ".join(asker.scopes),
                    is_test=asker.is_test,
                    created_at=EPOCH,
                )
            )


class RememberingWalk:
    """The walk, which remembers what it made in this process: the same inputs give the same bytes."""

    def __init__(self) -> None:
        self._layouts: dict[tuple[Any, ...], tuple[LaidOut, ...]] = {}
        self._files: dict[tuple[str, str | None], dict[str, bytes]] = {}

    def lay_out_discs(
        self,
        tune: bytes,
        movement: Movement,
        cutter: Cutter,
        settings: Settings,
        clock: Clock | None = None,
        *,
        most_s: float | None = None,
    ) -> tuple[LaidOut, ...]:
        asked = (walk.fingerprint_of(tune, movement, cutter, settings), settings.discs)
        if asked not in self._layouts:
            self._layouts[asked] = walk.lay_out_discs(tune, movement, cutter, settings, clock, most_s=most_s)
        return self._layouts[asked]

    def files_of(self, laid_out: LaidOut, *, not_good: str | None = None) -> dict[str, bytes]:
        asked = (laid_out.fingerprint, not_good)
        if asked not in self._files:
            self._files[asked] = walk.files_of(laid_out, not_good=not_good)
        return self._files[asked]


WALK: Any = RememberingWalk()


def keeper_of(parts: Parts) -> FileKeeper:
    """What keeps files."""
    return FileKeeper(parts.store, parts.files)


def placed(parts: Parts, asked: AskedOrder = ASKED, asker: Asker = WEB_SHOP) -> OrderView:
    """An order just placed."""
    return place_order(parts.store, keeper_of(parts), asker, asked, nothing_more)


def taken(parts: Parts, order_id: str, worker: str = "a worker", lease_s: float = 60.0) -> Taken:
    """The order in a worker's hands."""
    held = taking.take(parts.store, order_id, worker=worker, lease_s=lease_s, most_attempts=3)
    assert held is not None
    return held


def plan_of(parts: Parts, held: Taken) -> PlannedOrder:
    """Its plan, made in this process."""
    keeper = keeper_of(parts)
    inputs = OrderInputs(
        tune=keeper.read(held.tune_digest),
        movement=keeper.read(held.movement_digest),
        cutter=keeper.read(held.cutter_digest),
        settings=keeper.read(held.settings_digest),
        not_good=held.not_good,
    )
    return plan_order(inputs, WALK, keeper)


def plan_seen(parts: Parts, order_id: str) -> str:
    """The tag of the plan in force, as a person sees it; "" where there is none."""
    with parts.store.reading() as session:
        plan = find_order(session, SHOP, order_id).plan
    return "" if plan is None or plan.tag is None else plan.tag


def release_seen(
    parts: Parts, order_id: str, asker: Asker = SHOP, *, by: str = "Ada", despite: str | None = None
) -> OrderView:
    """The order released by a person who has looked at its plan."""
    word = Release(by=by, plan=plan_seen(parts, order_id), despite_findings=despite)
    return release_order(parts.store, asker, Seen(order_id=order_id), word, nothing_more)


def planned(parts: Parts, order_id: str) -> PlannedOrder:
    """The order planned, as a worker would."""
    held = taken(parts, order_id)
    plan = plan_of(parts, held)
    assert taking.publish(parts.store, held, plan)
    return plan
