"""What the shop asks: every line from one stated rate, in decimal numbers, rounded where money is.

A line is rounded to the currency's smallest coin, half to even: over many discs the roundings then cancel, where
half up would creep (the default of IEEE 754 and of banks' books: common practice). The total is the exact sum of
the rounded lines, so the lines always add up to it.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from decimal import ROUND_HALF_EVEN, Decimal

from layout.documents.making import Rates
from layout.making.making import PriceLine

# Currencies by the decimals of their smallest unit, by ISO 4217, from memory. One that is not here is not rounded.
_CODES_BY_DECIMALS = {
    0: "BIF CLP DJF GNF ISK JPY KMF KRW PYG RWF UGX VND VUV XAF XOF XPF",
    2: "AED ARS AUD BAM BGN BRL CAD CHF CNY COP CZK DKK EGP EUR GBP HKD HUF IDR ILS INR KES MAD MXN MYR NGN NOK NZD "
    "PEN PHP PKR PLN RON RSD SAR SEK SGD THB TRY TWD UAH USD UYU ZAR",
    3: "BHD IQD JOD KWD LYD OMR TND",
}
MINOR_UNIT_DECIMALS: Mapping[str, int] = {
    code: decimals for decimals, codes in _CODES_BY_DECIMALS.items() for code in codes.split()
}
QUANTITY_STEP = Decimal("0.0001")  # of a minute or a kilogram: 6 ms or 0.1 g, under what either is known to
SECONDS_PER_MINUTE = 60


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantities:
    """What can be charged for; None where it cannot be told."""

    time_s: float | None
    pierce_count: int | None
    hit_count: int | None
    blank_mass_kg: float | None


def price_lines(quantities: Quantities, rates: Rates) -> tuple[PriceLine, ...]:
    """A line for each stated rate whose quantity can be told, in the order of the rates' fields.

    Quantities are rounded to QUANTITY_STEP first, and the amount is worked from what is told, so that anybody can
    work it again.

    Args:
        quantities: What making the disc takes.
        rates: What the shop asks.
    """
    lines = []
    for name, per, rate, quantity in _asked(quantities, rates):
        if quantity is not None:
            amount = in_coins(quantity * rate, rates.currency)
            lines.append(PriceLine(name=name, quantity=quantity, per=per, rate=rate, amount=amount))
    return tuple(lines)


def total_of(lines: tuple[PriceLine, ...], quantities: Quantities, rates: Rates) -> Decimal | None:
    """The exact sum of the lines; None where no rate is stated, or one whose quantity cannot be told."""
    if not lines or any(quantity is None for *_, quantity in _asked(quantities, rates)):
        return None
    return sum((line.amount for line in lines), Decimal(0))


def in_coins(amount: Decimal, currency: str) -> Decimal:
    """The amount rounded half to even to the currency's smallest unit; as it is where the unit is not known."""
    decimals = MINOR_UNIT_DECIMALS.get(currency)
    return amount if decimals is None else amount.quantize(Decimal(1).scaleb(-decimals), rounding=ROUND_HALF_EVEN)


def _asked(quantities: Quantities, rates: Rates) -> Iterator[tuple[str, str, Decimal, Decimal | None]]:
    """Name, what is counted, rate and quantity of each stated rate."""
    minutes = None if quantities.time_s is None else quantities.time_s / SECONDS_PER_MINUTE
    for name, per, rate, quantity in (
        ("setup", "disc", rates.setup, Decimal(1)),
        ("machine time", "min", rates.per_minute, _told(minutes)),
        ("pierces", "pierce", rates.per_pierce, _counted(quantities.pierce_count)),
        ("hits", "hit", rates.per_hit, _counted(quantities.hit_count)),
        ("sheet", "kg", rates.per_kg, _told(quantities.blank_mass_kg)),
    ):
        if rate is not None:
            yield name, per, rate, quantity


def _told(value: float | None) -> Decimal | None:
    return None if value is None else Decimal(value).quantize(QUANTITY_STEP, rounding=ROUND_HALF_EVEN)


def _counted(count: int | None) -> Decimal | None:
    return None if count is None else Decimal(count)
