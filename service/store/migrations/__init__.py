"""The changes of the tables, one module each, in the order of their numbers."""
