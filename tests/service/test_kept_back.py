"""Whatever way a faulty disc is asked for, no cutting file comes unless a person asks for it with a reason.

Random movements, cutters and tunes whose disc has an error, through every door: the command, HTTP, archives, orders,
the files of a run.
"""

import io
import itertools
import json
import zipfile
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings

from layout.documents import Cutter, Movement
from layout.file_names import CUTTING_FILES
from service.commands.main import main
from service.parts import Parts
from tests.fuzz.random_machines import cutters, movements, tunes
from tests.fuzz.test_random_discs import FAULTS, faulty
from tests.service.api.test_runs import Shop
from tests.service.conftest import sqlite_alone
from tests.service.shop import archive_of, planned
from tests.thorough import THOROUGH

FIT = {"speed": {"mode": "fit", "least": 0.5, "most": 4}}
SPOILT = {"movement": movements(), "how": FAULTS, "cutter": cutters(), "tune": tunes()}
ENDINGS = tuple(f".{name.rsplit('.', 1)[1]}" for name in CUTTING_FILES)  # of names as they are saved
NUMBERS = itertools.count(1)


def for_cutting(names: list[str]) -> list[str]:
    """Those by which something could be cut; records are drawings too, and say in their names that they are none."""
    return [name for name in names if name.endswith(ENDINGS) and "record" not in name.lower()]


def is_refused(answer: Any) -> bool:
    """Whether a cutting file was not given, in words: kept back, or none of this cutter's files at all."""
    assert answer.status_code in (404, 409, 422), answer.status_code
    assert answer.content_type == "application/problem+json"
    return True


def text_of(document: Movement | Cutter, **more: Any) -> bytes:
    return json.dumps(document.model_dump(mode="json", exclude_none=True) | more).encode()


@settings(max_examples=30 if THOROUGH else 5, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(**SPOILT)
def test_the_command_keeps_a_faulty_disc_back(movement: Movement, how: str, cutter: Cutter, tune: bytes) -> None:
    with TemporaryDirectory() as folder:
        inputs = {"tune.mid": tune, "movement.json": text_of(faulty(movement, how)), "cutter.json": text_of(cutter)}
        for name, content in inputs.items():
            Path(folder, name).write_bytes(content)
        tune_path, movement_path, cutter_path = (str(Path(folder, name)) for name in inputs)
        asked = ["plan", tune_path, "--movement", movement_path, "--cutter", cutter_path, "--out", f"{folder}/out"]

        code = main(asked)

        assert code == 3
        names = [path.name for path in Path(folder, "out").iterdir()]
        assert "layout.json" in names
        assert for_cutting(names) == []


@pytest.fixture
def shop(any_parts: Parts) -> Any:
    opened = Shop(any_parts)
    yield opened
    opened.close()


@sqlite_alone("which discs are given is decided above the store")
@settings(max_examples=30 if THOROUGH else 5, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(**SPOILT)
def test_http_keeps_a_faulty_disc_back(shop: Shop, movement: Movement, how: str, cutter: Cutter, tune: bytes) -> None:
    def ask(accept: str) -> Any:
        parts = {
            "tune": (io.BytesIO(tune), "tune.mid"),
            "movement": (io.BytesIO(text_of(faulty(movement, how))), "movement.json"),
            "cutter": (io.BytesIO(text_of(cutter)), "cutter.json"),
        }
        return shop.http.post("/v1/layouts", data=parts, headers={**shop.shop, "Accept": accept})

    made = ask("application/json")

    assert made.status_code == 201, made.text
    assert made.json["good_to_cut"] is False
    for name in CUTTING_FILES:
        assert is_refused(shop.http.get(f"{made.headers['Location']}/{name}", headers=shop.shop))
    assert is_refused(ask("image/vnd.dxf"))
    archive = ask("application/zip")
    names = zipfile.ZipFile(io.BytesIO(archive.data)).namelist() if archive.status_code == 200 else []
    assert for_cutting(names) == []


@sqlite_alone("which discs are given is decided above the store")
@settings(max_examples=30 if THOROUGH else 5, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(**SPOILT)
def test_orders_and_runs_keep_a_faulty_disc_back(
    shop: Shop, movement: Movement, how: str, cutter: Cutter, tune: bytes
) -> None:
    name = f"lot-{next(NUMBERS)}"
    for kind, text in (("movements", text_of(faulty(movement, how), id=name)), ("cutters", text_of(cutter, id=name))):
        once = {**shop.shop, "If-None-Match": "*", "Content-Type": "application/json"}
        assert shop.http.put(f"/v1/{kind}/{name}", data=text, headers=once).status_code == 201
    run_id = shop.opened(archive_of(a=tune), {"movements": [name], "cutter": name}, shop.shop)
    [item] = shop.get(f"/v1/runs/{run_id}/items", shop.shop)["items"]
    order_id = item["order"]["id"] if isinstance(item["order"], dict) else item["order"]

    planned(shop.parts, order_id)

    assert shop.seen(order_id, shop.shop)["state"] == "attention"
    assert shop.decide(order_id, "release", shop.shop, by="Ada").status_code in (409, 422)
    results = shop.http.get(f"/v1/runs/{run_id}/results.zip", headers=shop.shop)
    names = zipfile.ZipFile(io.BytesIO(results.data)).namelist()
    assert any(one.endswith("json") for one in names)
    assert for_cutting(names) == []
    for file in CUTTING_FILES:
        assert is_refused(shop.http.get(f"/v1/orders/{order_id}/plans/1/files/1/{file}", headers=shop.shop))
