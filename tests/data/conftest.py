"""A study with a data file, made in a temporary folder."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from reanalysis.study.read import load_study
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]


@pytest.fixture
def study_of(tmp_path: Path) -> StudyOf:
    """Write a data file and a study of it; `extra` holds lines of `[data]`."""

    def build(content: str | bytes | Callable[[Path], None], name: str = "d.csv", extra: str = "") -> Study:
        path = tmp_path / name
        if callable(content):
            content(path)
        else:
            path.write_bytes(content.encode() if isinstance(content, str) else content)
        (tmp_path / "s.toml").write_text(
            f'title = "t"\n[data]\nfile = "{name}"\n{extra}\n'
            '[model]\nformula = "y ~ x"\nfamily = "gaussian"\n',
            encoding="utf-8",
        )
        return load_study(tmp_path / "s.toml")

    return build
