"""The engine's version: part of every fingerprint, since another version may draw another disc."""

ENGINE_VERSION = "0.1.0"
