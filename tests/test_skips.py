"""The rule of `conftest.py` that a skipped test is a failure in CI."""

from __future__ import annotations

from pathlib import Path

import pytest

pytest_plugins = ["pytester"]

EXCUSES = {
    "mark": "@pytest.mark.skip(reason='later')\ndef test_it(): pass",
    "call": "def test_it(): pytest.skip('later')",
    "xfail": "@pytest.mark.xfail\ndef test_it(): raise ValueError",
    "lenient xpass": "@pytest.mark.xfail(strict=False)\ndef test_it(): pass",
}


@pytest.fixture
def inner(pytester: pytest.Pytester) -> pytest.Pytester:
    """Return an empty test folder that has our conftest."""
    pytester.makeconftest((Path(__file__).parent / "conftest.py").read_text(encoding="utf-8"))
    return pytester


@pytest.mark.parametrize("excuse", EXCUSES.values(), ids=EXCUSES.keys())
def test_excused_test_fails_in_ci(
    inner: pytest.Pytester, monkeypatch: pytest.MonkeyPatch, excuse: str
) -> None:
    """Each way of excusing a test fails the run when CI is set."""
    monkeypatch.setenv("CI", "true")
    inner.makepyfile(f"import pytest\n{excuse}")

    result = inner.runpytest_inprocess("-p", "no:cacheprovider")

    # A mark takes effect before the test's own call: pytest counts that as an error.
    assert result.parseoutcomes() in ({"failed": 1}, {"errors": 1})
    assert result.ret == pytest.ExitCode.TESTS_FAILED


def test_skipped_module_fails_in_ci(inner: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> None:
    """A module that skips itself on import counts as an error when CI is set."""
    monkeypatch.setenv("CI", "true")
    inner.makepyfile("import pytest\npytest.importorskip('no_such_module')\ndef test_it(): pass")

    inner.runpytest_inprocess("-p", "no:cacheprovider").assert_outcomes(errors=1)


def test_skip_is_allowed_elsewhere(inner: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> None:
    """Outside CI a skipped test is only skipped, and a passing one passes in either case."""
    monkeypatch.delenv("CI", raising=False)
    inner.makepyfile(f"import pytest\n{EXCUSES['mark']}\ndef test_other(): pass")

    inner.runpytest_inprocess("-p", "no:cacheprovider").assert_outcomes(skipped=1, passed=1)
