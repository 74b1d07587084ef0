"""A client of the service, made from its API document alone: it imports nothing else of this program.

`Client` has a method for each operation, and a few for what a shop's program does with several.
"""
