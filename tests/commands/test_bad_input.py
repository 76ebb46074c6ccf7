"""Input that cannot be analysed: a message that helps, an exit code, and nothing left behind."""

from __future__ import annotations

import gzip
import io
import re
import shutil
import zipfile
from collections.abc import Callable
from typing import Any

import pytest

HEAD = "grams,bag,weeks\n"


def data(content: str | bytes) -> Callable[[Any], None]:
    """Put something else in the data file."""
    return lambda desk: desk.data.write_bytes(content.encode() if isinstance(content, str) else content)


def study(*edits: tuple[str, str]) -> Callable[[Any], None]:
    """Replace texts in the study file."""

    def spoil(desk: Any) -> None:
        for old, new in edits:
            desk.edit(old, new)

    return spoil


def renamed(name: str, content: bytes) -> Callable[[Any], None]:
    """Write a data file of another format and name it in the study."""

    def spoil(desk: Any) -> None:
        (desk.folder / name).write_bytes(content)
        desk.edit('"pears.csv"', f'"{name}"')

    return spoil


def without_study(make: Callable[[Any], None]) -> Callable[[Any], None]:
    """Put something else in the place of the study file."""

    def spoil(desk: Any) -> None:
        desk.study.unlink()
        make(desk.study)

    return spoil


def bomb_gz() -> bytes:
    """30 MB of rows that repeat themselves, in some 100 kB."""
    return gzip.compress(HEAD.encode() + (b"180," + b"n" * 1000 + b",3\n") * 30_000)


def bomb_xlsx() -> bytes:
    """A workbook whose only sheet is 30 MB of one character."""
    file = io.BytesIO()
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("xl/worksheets/sheet1.xml", b"7" * 30_000_000)
    return file.getvalue()


def outside(desk: Any) -> None:
    """Move the data one folder up and say so in the study."""
    desk.data.rename(desk.folder.parent / "pears.csv")
    desk.edit('"pears.csv"', '"../pears.csv"')


def too_many_levels(desk: Any) -> None:
    """Five hundred bags of one pear each."""
    rows = "".join(f"{150 + k % 37},bag{k},{k % 11}\n" for k in range(500))
    desk.data.write_text(HEAD + rows)
    desk.edit('levels = { bag = ["none", "paper", "net"] }', "")
    desk.edit('"bag[paper]"', '"bag[bag1]"')


CONSTANT = HEAD + "".join(f"180,{bag},{week}\n" for week in range(9) for bag in ("none", "paper", "net"))

CASES: dict[str, tuple[Callable[[Any], None], list[str]]] = {
    "empty file": (data(""), ["pears.csv", "the file is empty"]),
    "header only": (data(HEAD), ["pears.csv", "no data", "one row or more"]),
    "one row": (data(HEAD + "180,none,3\n"), ["model.formula", "complete rows: 1", "at least 3 rows"]),
    "no complete row": (data(HEAD + ",none,3\n170,,4\n"), ["none of the 2 rows", "grams in 1, bag in 1"]),
    "constant response": (data(CONSTANT), ["grams", "180 in every row", "an outcome that varies"]),
    "text among numbers": (
        data(HEAD + "180,none,3\nheavy,paper,4\n170,net,5\n"),
        ["pears.csv, column grams", '"heavy" (line 3)', "decimal commas", "missing_values"],
    ),
    "infinite value": (
        data(HEAD + "180,none,3\ninf,paper,4\n170,net,5\n"),
        ["pears.csv, line 3, column grams", "inf is not a finite number"],
    ),
    "line of 10 MB": (
        data(HEAD + "1" * 10_000_000 + ",none,3\n"),
        ["pears.csv, line 2", "more than 1,000,000 characters"],
    ),
    "500 levels in 500 rows": (too_many_levels, ["501 columns", "complete rows: 500", "merge the levels"]),
    "gzip bomb": (renamed("pears.csv.gz", bomb_gz()), ["pears.csv.gz", "unpacks to more than 200 times"]),
    "workbook bomb": (renamed("pears.xlsx", bomb_xlsx()), ["pears.xlsx", "unpacks to more than 200 times"]),
    "no workbook": (
        renamed("pears.xlsx", b"grams,bag"),
        ["pears.xlsx", "not a readable .xlsx file", "or as CSV"],
    ),
    "no such data file": (
        study(('"pears.csv"', '"plums.csv"')),
        ["pears.toml, line 5, data.file", '"plums.csv"', "put the data file beside the study file"],
    ),
    "address of a data file": (
        study(('"pears.csv"', '"https://example.org/x.csv"')),
        ["line 5", "data.file"],
    ),
    "data outside the folder": (outside, ["pears.toml, line 5", "lies outside", "--allow-outside"]),
    "missing column": (study(("bag + weeks", "bag + months")), ["`months`", "grams, bag, weeks"]),
    "misspelt key": (
        study(("formula =", "formulla =")),
        ["pears.toml, line 10, model.formulla", "unknown key", "did you mean `formula`?"],
    ),
    "code in the formula": (
        study(("bag + weeks", "bag + np.savetxt('f', weeks)")),
        ["model.formula", "np.savetxt", "not allowed"],
    ),
    "unknown effect": (
        study(("bag[paper]", "bag[silk]")),
        [
            "pears.toml, line",
            "question no. 1, effect",
            '"bag[silk]"',
            "Intercept, bag[paper], bag[net], weeks",
        ],
    ),
    "binary study file": (
        without_study(lambda path: path.write_bytes(b"\x89PNG\r\n\x00")),
        ["pears.toml, line 1", "not UTF-8"],
    ),
    "study file in another language": (
        without_study(lambda path: path.write_text("title: pears\n")),
        ["pears.toml, line 1", "not valid TOML", "texts need quotes"],
    ),
    "empty study file": (
        without_study(lambda path: path.touch()),
        ["pears.toml: 3 problems", "`title` is missing", "[data] is missing", "[model] is missing"],
    ),
    "folder for a study file": (without_study(lambda path: path.mkdir()), ["pears.toml: this is a folder"]),
    "no such study file": (without_study(lambda _: None), ["pears.toml: there is no such file"]),
}


def says_what_to_do(ran: Any, fragments: list[str]) -> None:
    """Check that a message names everything, with advice for each problem, and shows no inside of ours."""
    for fragment in fragments:
        assert fragment in ran.stderr, ran.stderr
    count = re.match(r"[\w.]+: (\d+) problems?\n", ran.stderr)
    assert count is not None, ran.stderr
    assert int(count[1]) == ran.stderr.count("to do: ") > 0
    for inside in ("Traceback", "Error(", "pydantic", "site-packages", "None"):
        assert inside not in ran.stderr


@pytest.mark.parametrize("case", CASES)
def test_check_refuses(desk: Any, case: str) -> None:
    """The check names input, finding, what is allowed and what to do, and prints nothing else."""
    spoil, fragments = CASES[case]
    spoil(desk)

    ran = desk.run("check", desk.study)

    assert (ran.code, ran.stdout) == (2, "")
    says_what_to_do(ran, fragments)


@pytest.mark.parametrize("case", CASES)
def test_report_refuses(desk: Any, case: str) -> None:
    """The report says the same, calls the input invalid, and leaves no file and no folder anywhere."""
    spoil, fragments = CASES[case]
    spoil(desk)
    before = sorted(desk.folder.parent.rglob("*"))

    ran = desk.report()

    assert (ran.code, ran.stdout) == (2, "pears: invalid input\n")
    says_what_to_do(ran, fragments)
    assert sorted(desk.folder.parent.rglob("*")) == before


def test_endless_data_file(desk: Any) -> None:
    """A device is no data file, even where files outside the folder are allowed."""
    desk.edit('"pears.csv"', '"/dev/zero"')

    ran = desk.run("check", desk.study, "--allow-outside")

    assert ran.code == 2
    says_what_to_do(ran, ["pears.toml, line 5, data.file", "/dev/zero"])


def test_data_outside_may_be_allowed(desk: Any) -> None:
    """With the switch, a data file one folder up is read."""
    outside(desk)

    ran = desk.run("check", desk.study, "--allow-outside")

    assert (ran.code, ran.stderr) == (0, "")
    assert "28 used of 30 in pears.csv" in ran.stdout


PLACES: dict[str, tuple[Callable[[Any], None], str]] = {
    "file for a folder": (lambda desk: desk.out.touch(), "out: this is a file"),
    "somebody's folder": (
        lambda desk: shutil.copytree(desk.folder, desk.out / "pears"),
        "pears: the report would replace this folder, which also holds improper.toml, pears.csv, pears.toml",
    ),
    "file of the study's name": (
        lambda desk: (desk.out.mkdir(), (desk.out / "pears").touch()),
        "pears: this is a file, and the study's folder would take its place",
    ),
}


@pytest.mark.parametrize("case", PLACES)
def test_place_of_the_report(desk: Any, monkeypatch: pytest.MonkeyPatch, case: str) -> None:
    """A place that cannot be used is refused before anything is fitted, and stays as it is."""
    monkeypatch.setattr(
        "reanalysis.analysis.run.analyse", lambda *_, **__: pytest.fail("something was fitted")
    )
    prepare, fragment = PLACES[case]
    prepare(desk)
    before = sorted(desk.folder.parent.rglob("*"))

    ran = desk.report()

    assert (ran.code, ran.stdout) == (2, "pears: invalid input\n")
    says_what_to_do(ran, [fragment, "choose another --out"])
    assert sorted(desk.folder.parent.rglob("*")) == before


@pytest.mark.parametrize(
    ("words", "fragments"),
    [
        (["report", "x.toml", "--formats", "html,docx"], ["--formats: found docx", "html, pdf, json, csv"]),
        (["report", "x.toml", "--formats", " , "], ["--formats: found nothing", "html, pdf, json, csv"]),
        (["report", "x.toml", "--cores", "0"], ["--cores: found '0'", "a whole number from 1 to 256"]),
        (["report", "x.toml", "--cores", "²"], ["--cores: found '²'"]),
        (["report"], ["the following arguments are required: STUDY"]),
        (["reprot", "x.toml"], ["'reprot'", "check", "report"]),
        ([], ["COMMAND"]),
    ],
)
def test_wrong_usage(desk: Any, words: list[str], fragments: list[str]) -> None:
    """A command line that cannot be meant is refused with what is allowed."""
    ran = desk.run(*words)

    assert (ran.code, ran.stdout) == (2, "")
    assert all(fragment in ran.stderr for fragment in fragments), ran.stderr
    assert "Traceback" not in ran.stderr


def test_two_studies_of_one_name(desk: Any) -> None:
    """The second study whose folder would be the first one's is refused; the first is reported."""
    (desk.folder / "again").mkdir()
    twin = shutil.copy(desk.study, desk.folder / "again")
    shutil.copy(desk.data, desk.folder / "again")

    ran = desk.report(desk.study, twin)

    assert ran.code == 2
    assert ran.stdout == f"pears: invalid input\npears: sound -> {desk.out / 'pears'}\n"
    says_what_to_do(ran, [str(twin), str(desk.study), "would be called pears", "rename one of the files"])
    assert desk.written() == ["pears", "pears/estimates.csv", "pears/provenance.json", "pears/results.json"]


def test_good_study_beside_a_bad_one(desk: Any) -> None:
    """The bad study is named, the good one is reported all the same."""
    desk.edit("spray + rain", "spray + sun", file="separated.toml")

    ran = desk.report(desk.folder / "separated.toml", desk.study)

    assert ran.code == 2
    says_what_to_do(ran, ["separated.toml: 1 problem", "`sun`"])
    assert "pears.toml" not in ran.stderr
    assert ran.stdout.splitlines() == ["separated: invalid input", f"pears: sound -> {desk.out / 'pears'}"]
    assert desk.written() == ["pears", "pears/estimates.csv", "pears/provenance.json", "pears/results.json"]
