"""Read back: from the bytes of a drawing to the disc that would be cut."""

from layout.read_back.reader import read_back
from layout.read_back.reading import Reading

__all__ = ["Reading", "read_back"]
