"""The types of messages to hooks, with what each means: the published list."""

from types import MappingProxyType

TEST_TYPE = "hook.test"

# The types of events of orders (service.orders.states.EventType), and the test. More may come.
MEANINGS = MappingProxyType(
    {
        "order.received": "An order was kept and waits to be planned.",
        "order.planned": "A plan was made; data.state says where it led: attention, ready or failed.",
        "order.attention": "A person must decide: a finding forbids cutting, or more is lost than the order allows.",
        "order.ready": "The plan stands without a fault and waits for release.",
        "order.released": "The cutting files may be taken.",
        "order.failed": "The order cannot be planned; its reason says why.",
        "order.cancelled": "The order was cancelled; where it had been released, the shop confirmed the recall.",
        "order.superseded": "The released plan is not the one to cut any more; a newer revision takes its place.",
        "order.accepted": "The customer accepted the proof.",
        "order.declined": "The customer declined the proof.",
        "order.taken": "The shop has taken the cutting files.",
        "order.cut": "The shop has cut discs.",
        "order.scrapped": "The shop has scrapped discs.",
        "order.measured": "The shop has measured discs.",
        "order.erased": "The personal data of the order was deleted; what is left is a tombstone.",
        TEST_TYPE: "Sent when a test is asked for, to that hook alone and once; nothing happened to any order.",
    }
)
ORDER_TYPES = tuple(kind for kind in MEANINGS if kind != TEST_TYPE)  # those that a hook can ask for
