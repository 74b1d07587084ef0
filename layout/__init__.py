"""The computation: MIDI bytes to a disc that can be cut, checked and played back.

Nothing here knows the web service, a database, a clock or a socket. The walk is
read, arrange, place, check, cut, write; `layout.walk` composes it.
"""
