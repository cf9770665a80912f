"""A folder to import in, empty or with four good runs of one source in the store."""

from __future__ import annotations

import shutil
from pathlib import Path
from typing import Any

import pytest
from import_made import ROWS, Desk, Mapped


@pytest.fixture
def desk(tmp_path: Path, capsys: Any) -> Desk:
    return Desk(tmp_path, capsys)


@pytest.fixture(scope="session")
def base_store(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The store that `stocked` copies; made once, because an import costs a second of table making."""

    class Unread:
        def readouterr(self) -> Any:
            return type("Printed", (), {"out": "", "err": ""})

    folder = tmp_path_factory.mktemp("base")
    assert Desk(folder, Unread()).bring(Mapped(), ROWS)[0] == 0
    return folder


@pytest.fixture
def stocked(base_store: Path, desk: Desk) -> Desk:
    for path in base_store.iterdir():
        shutil.copy2(path, desk.folder / path.name)
    desk.capsys.readouterr()
    return desk
