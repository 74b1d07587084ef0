"""What the files of a disc are sent as."""

JSON_MEDIA_TYPE = "application/json"
WAV_MEDIA_TYPE = "audio/wav"  # what every browser knows; RFC 2361 registers audio/vnd.wave
MIDI_MEDIA_TYPE = "audio/midi"
MEDIA_TYPES = {
    "disc.dxf": "image/vnd.dxf",
    "record.dxf": "image/vnd.dxf",
    "disc.svg": "image/svg+xml",
    "hits.csv": "text/csv; charset=utf-8",
    "layout.json": JSON_MEDIA_TYPE,
    "report.json": JSON_MEDIA_TYPE,
    "press.nc": "text/plain; charset=us-ascii",  # ISO 6983 has no media type of its own
    "work-sheet.pdf": "application/pdf",
    "making.json": JSON_MEDIA_TYPE,
}
