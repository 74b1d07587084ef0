"""Files packed into one ZIP archive: the answer where one file is not enough."""

import io
import zipfile
from collections.abc import Mapping

ZIP_MEDIA_TYPE = "application/zip"
FIRST_DAY = (1980, 1, 1, 0, 0, 0)  # the earliest a ZIP archive can state; no clock, so that the bytes are the same
READABLE = 0o644  # the rights of each file once it is unpacked


def archive_of(files: Mapping[str, bytes]) -> bytes:
    """A ZIP archive of these files; the same files give the same bytes.

    Args:
        files: By their path in the archive.
    """
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        for path, content in files.items():
            member = zipfile.ZipInfo(path, FIRST_DAY)
            member.compress_type, member.external_attr = zipfile.ZIP_DEFLATED, READABLE << 16
            archive.writestr(member, content)
    return buffer.getvalue()
