import os
from pathlib import Path

import pytest

from service.limits import Limits
from service.settings import SettingsError, settings_from


def test_without_variables_all_workers_of_a_user_share_one_folder() -> None:
    settings = settings_from({})

    assert settings == settings_from({})
    assert settings.cache_directory.name == f"discwright-layouts-{os.getuid()}"
    assert settings.limits == Limits()


def test_variables_choose_the_folder_and_the_size_of_the_cache() -> None:
    settings = settings_from(
        {"DISCWRIGHT_CACHE": "/srv/x", "DISCWRIGHT_CACHE_LAYOUTS": "7", "DISCWRIGHT_CACHE_BYTES": "123456"}
    )

    assert settings.cache_directory == Path("/srv/x")
    assert settings.limits == Limits(cache_layouts=7, cache_bytes=123_456)


@pytest.mark.parametrize("number", ["0", "-1", "many", "1.5", "²", "9" * 19])
def test_a_number_that_is_none_is_refused(number: str) -> None:
    with pytest.raises(SettingsError, match=r"DISCWRIGHT_CACHE_BYTES is '.*'; it must be a whole number from 1"):
        settings_from({"DISCWRIGHT_CACHE_BYTES": number})
