"""The life of an order, apart from HTTP: placed, taken, planned, decided, released, erased."""
