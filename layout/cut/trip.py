"""A round trip as a list of stops that is turned round in part, again and again."""

from dataclasses import dataclass, field


@dataclass(slots=True, eq=False, kw_only=True)
class Trip:
    """A round trip: each stop once, the first after the last.

    Attributes:
        order: The stops in their order.
        place: For each stop where it stands in that.
    """

    order: list[int]
    place: list[int] = field(init=False)

    def __post_init__(self) -> None:
        self.place = [0] * len(self.order)
        for place, stop in enumerate(self.order):
            self.place[stop] = place

    def steps(self, begin: int, stop: int) -> int:
        """How many steps a stop is from another, along the trip."""
        return (self.place[stop] - self.place[begin]) % len(self.order)

    def join(self, a: int, b: int, c: int, d: int) -> None:
        """Turn a–b and c–d into a–c and b–d, where b comes after a and d after c, both one way round."""
        order, place = self.order, self.place
        if order[place[a] + 1 - len(order)] == b:
            self._turn_round(place[b], place[c])
        else:
            self._turn_round(place[a], place[d])

    def _turn_round(self, begin: int, end: int) -> None:
        """Reverse the stops from one place of the order to another; or all others, which is the same round trip."""
        order, place, count = self.order, self.place, len(self.order)
        inside = (end - begin) % count + 1
        if 2 * inside > count:
            begin, end, inside = (end + 1) % count, (begin - 1) % count, count - inside
        if inside <= 1:
            return
        if begin < end:
            turned = order[begin : end + 1]
            turned.reverse()
            order[begin : end + 1] = turned
            for at, stop in enumerate(turned, begin):
                place[stop] = at
        else:
            turned = order[begin:] + order[: end + 1]
            turned.reverse()
            order[begin:], order[: end + 1] = turned[: count - begin], turned[count - begin :]
            for at, stop in enumerate(turned, begin):
                place[stop] = at % count
