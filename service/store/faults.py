"""Ways in which keeping something can fail, each with what the asker should do."""


class StoreError(Exception):
    """Nothing was kept; the text is one line fit to show."""


class StoreBusyError(StoreError):
    """The database does not answer or is held by another; asking again later will do."""


class StoreFullError(StoreError):
    """There is no room on the disk; asking again will do when the shop has made some."""


class StoreOldError(StoreError):
    """The database was made by another version of the program; it must be migrated first."""
