"""The operations of the API, as its document describes them: one module for each group."""
