"""The operations of the API. Written by generate.py from the API document; not to be changed by hand."""

from service.client.operations.about import OfAbout
from service.client.operations.catalogue import OfCatalogue
from service.client.operations.data import OfData
from service.client.operations.events import OfEvents
from service.client.operations.hooks import OfHooks
from service.client.operations.keys import OfKeys
from service.client.operations.layouts import OfLayouts
from service.client.operations.operations import OfOperations
from service.client.operations.orders import OfOrders
from service.client.operations.proofs import OfProofs
from service.client.operations.quotes import OfQuotes
from service.client.operations.runs import OfRuns
from service.client.operations.sheets import OfSheets
from service.client.operations.signing_in import OfSigningIn
from service.client.operations.trial_pieces import OfTrialPieces


class Operations(
    OfAbout,
    OfCatalogue,
    OfData,
    OfEvents,
    OfHooks,
    OfKeys,
    OfLayouts,
    OfOperations,
    OfOrders,
    OfProofs,
    OfQuotes,
    OfRuns,
    OfSheets,
    OfSigningIn,
    OfTrialPieces,
):
    """A method for each operation of the API."""
