"""From study to data set."""

from __future__ import annotations

import hashlib
from collections.abc import Callable

import pytest

from reanalysis.data.complete import complete_cases
from reanalysis.data.fingerprint import Fingerprint, fingerprint
from reanalysis.data.load import load_dataset
from reanalysis.errors import DataError
from reanalysis.study.spec import Study

StudyOf = Callable[..., Study]


def test_a_data_set_is_identified_by_its_bytes(study_of: StudyOf) -> None:
    """Hash and size are those of the file as it is, packed or not."""
    content = b"x\n" + b"1\n" * 1_000_000
    study = study_of(content)

    assert fingerprint(study.data_path) == Fingerprint(hashlib.sha256(content).hexdigest(), 2_000_002)
    small = study_of("x\n1\n")
    dataset = load_dataset(small, columns=frozenset({"x"}))
    assert dataset.sha256 == hashlib.sha256(b"x\n1\n").hexdigest()
    assert dataset.size == 4


def test_levels_units_and_missing_values_of_the_study_are_used(study_of: StudyOf) -> None:
    """What the study declares decides how cells are read."""
    extra = 'levels = { g = ["none", "film"] }\nmissing_values = ["", "-"]\nunits = { y = "N" }'
    dataset = load_dataset(study_of("y,g\n1,film\n-,none\n", extra=extra), columns=frozenset({"y", "g"}))

    assert list(dataset.frame["g"].cat.categories) == ["none", "film"]
    assert complete_cases(dataset.frame, "complete-cases").dropped_by == (("y", 1),)
    assert dataset.notes == ('Column y: "-" read as missing in 1 row.',)


def test_a_file_with_only_missing_values(study_of: StudyOf) -> None:
    """The rows load; that none of them is complete is an error of its own."""
    dataset = load_dataset(study_of("y,x\n,1\n,2\n"), columns=frozenset({"y", "x"}))

    with pytest.raises(DataError, match="missing: y in 2"):
        complete_cases(dataset.frame, "complete-cases")


def test_a_file_that_is_gone(study_of: StudyOf) -> None:
    """A file that vanished since the study was read is reported."""
    study = study_of("x\n1\n")
    study.data_path.unlink()

    with pytest.raises(DataError, match="the file cannot be read"):
        load_dataset(study, columns=frozenset({"x"}))
