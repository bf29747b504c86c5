"""Cards read as they did when a person last looked."""

import pytest

from tests.golden.write import FOLDER, made

NAMES = sorted(path.name for path in FOLDER.glob("*.*") if path.suffix in (".txt", ".html"))


def test_every_file_is_made() -> None:
    assert sorted(made()) == NAMES
    assert len(NAMES) > 5


@pytest.mark.parametrize("name", NAMES)
def test_reads_as_before(name: str) -> None:
    kept = (FOLDER / name).read_text(encoding="utf-8")
    assert made()[name] == kept, "read the difference; python -m tests.golden.write keeps what is right"
