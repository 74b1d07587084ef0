"""How many requests of this process may wait or stream at a time, so that threads are left for all others.

A request that waits and a stream of events each hold a thread. Who finds no place is not refused: it is answered
with what there is at the moment, as if it had waited so long already. No key has more than its share of the places,
so that one that streams from everywhere leaves room for the others. Each process counts for itself.
"""

import math
import threading
from collections import Counter

from flask import Flask, current_app

from service.web_turns import give_up_turn

WAITING_ROOM = "discwright waiting room"
SHARE_OF_A_KEY = 0.5  # of the places, rounded up


class WaitingRoom:
    """Places for requests that wait; shared by the threads of a process."""

    def __init__(self, places: int | None = None) -> None:
        """Open it.

        Args:
            places: How many there are; None where nobody is short of threads.
        """
        self._places = places
        self._of_a_key = None if places is None else math.ceil(places * SHARE_OF_A_KEY)
        self._taken: Counter[str] = Counter()
        self._lock = threading.Lock()

    def enter(self, key_id: str) -> bool:
        """Take a place; False where none is free, or the key has its share. Who took one gives it back by `leave`."""
        with self._lock:
            is_full = self._places is not None and self._taken.total() >= self._places
            if is_full or (self._of_a_key is not None and self._taken[key_id] >= self._of_a_key):
                return False
            self._taken[key_id] += 1
        give_up_turn()
        return True

    def leave(self, key_id: str) -> None:
        """Give a place back."""
        with self._lock:
            self._taken[key_id] -= 1
            if not self._taken[key_id]:
                del self._taken[key_id]


def open_waiting_room(app: Flask, places: int | None) -> None:
    """Say how many requests of an app may wait at a time; where nobody says, as many as like.

    Args:
        app: The app.
        places: How many; None for as many as like.
    """
    app.extensions[WAITING_ROOM] = WaitingRoom(places)


def waiting_room() -> WaitingRoom:
    """The waiting room of the app of the request at hand."""
    room: WaitingRoom = current_app.extensions.get(WAITING_ROOM) or WaitingRoom()
    return room
