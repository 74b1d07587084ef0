"""Who asks: a key, as the rest of the service sees it."""

from dataclasses import dataclass

from service.access.scopes import Scope


@dataclass(frozen=True, slots=True, kw_only=True)
class Asker:
    """The key that a request was made with.

    Attributes:
        key_id: Of the key.
        owner_id: Whose key it is.
        title: What the key is called.
        is_shop: Whether the owner is the shop itself.
        is_test: Whether its orders never reach the shop.
        scopes: What it may do.
    """

    key_id: str
    owner_id: str
    title: str
    is_shop: bool
    is_test: bool
    scopes: frozenset[Scope]

    @property
    def sees_all_owners(self) -> bool:
        """Whether what belongs to others exists for it: for the shop's own keys, but not for one for tests."""
        return self.is_shop and not self.is_test
