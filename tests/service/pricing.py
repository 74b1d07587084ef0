"""A planner that computes nothing and tells what a disc costs."""

import json
from dataclasses import dataclass, field
from typing import Any

from tests.service.fakes import FakePlanner

# A disc's price as making.json tells it: 12.50 + 1.09 min × 1.80 = 1.962, so 1.96, + 4 × 0.05.
LINES = [
    {"name": "setup", "quantity": "1", "per": "disc", "rate": "12.50", "amount": "12.50"},
    {"name": "machine time", "quantity": "1.0900", "per": "min", "rate": "1.80", "amount": "1.96"},
    {"name": "pierces", "quantity": "4", "per": "pierce", "rate": "0.05", "amount": "0.20"},
]
PRICED: dict[str, Any] = {
    "price_lines": LINES,
    "total": "14.66",
    "currency": "EUR",
    "not_stated": [],
    "not_counted": [],
}


@dataclass
class PricingPlanner(FakePlanner):
    """A planner whose discs all have the same price, or none."""

    priced: dict[str, Any] = field(default_factory=lambda: PRICED)

    def files_of(self, laid_out: Any, *, not_good: str | None = None) -> dict[str, bytes]:
        files = super().files_of(laid_out, not_good=not_good)
        return {**files, "making.json": json.dumps(json.loads(files["making.json"]) | self.priced).encode()}
