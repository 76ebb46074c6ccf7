"""Study file -> `Study`, and every way in which it can be wrong."""

from __future__ import annotations

import contextlib
import hashlib
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.errors import StudyError
from reanalysis.study.read import MAX_STUDY_BYTES, json_schema, load_study

GOOD = """\
title = "Firmness"
[data]
file = "firmness.csv"
levels = { liner = ["none", "film"] }
[model]
formula = "firmness ~ liner"
family = "gaussian"
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with a data file."""
    folder = tmp_path / "study"
    folder.mkdir()
    (folder / "firmness.csv").write_text("firmness,liner\n1,none\n", encoding="utf-8")
    return folder


def write(folder: Path, text: str) -> Path:
    """Write a study file."""
    path = folder / "firmness.toml"
    path.write_bytes(text.encode())
    return path


def problems(path: Path, *, allow_outside: bool = False) -> dict[str, str]:
    """Each problem's place (without the file's name) and its text."""
    with pytest.raises(StudyError) as caught:
        load_study(path, allow_outside=allow_outside)
    assert all(problem.where.startswith(path.name) for problem in caught.value.problems)
    assert all(problem.advice for problem in caught.value.problems)
    return {p.where.removeprefix(path.name).removeprefix(", "): str(p) for p in caught.value.problems}


def test_a_good_file_becomes_a_study(folder: Path) -> None:
    """A study knows its name, its files and the hash of what it was read from."""
    study = load_study(write(folder, GOOD))

    assert study.name == "firmness"
    assert study.data_path == (folder / "firmness.csv").resolve()
    assert study.sha256 == hashlib.sha256(GOOD.encode()).hexdigest()
    assert study.spec.data.levels == {"liner": ("none", "film")}
    assert study.spec.model.main_prior == "weak"


def test_a_byte_order_mark_is_no_problem(folder: Path) -> None:
    """Editors that mark UTF-8 files are forgiven."""
    assert load_study(write(folder, "\ufeff" + GOOD)).spec.title == "Firmness"


def test_misspelt_keys_are_all_reported_with_lines(folder: Path) -> None:
    """One run shows every misspelt key, its line and what was probably meant."""
    text = GOOD.replace("title", "titel").replace("family", "famly").replace("levels", "levls")

    found = problems(write(folder, text))

    assert set(found) == {
        "title",
        "line 1, titel",
        "line 4, data.levls",
        "line 5, model.family",
        "line 7, model.famly",
    }
    assert "did you mean `levels`" in found["line 4, data.levls"]
    assert "unknown key `famly` in [model]" in found["line 7, model.famly"]
    assert "the key `family` is missing in [model]" in found["line 5, model.family"]


def test_a_key_of_another_section_is_sent_home(folder: Path) -> None:
    """A known key in the wrong section is told where it belongs."""
    found = problems(write(folder, "seed = 1\n" + GOOD))

    assert "move it to [computation]" in found["line 1, seed"]


@pytest.mark.parametrize(
    ("addition", "place", "words"),
    [
        ('link = "log"', "line 8, model.link", '"log" is not offered with the family "gaussian"'),
        ('link = "lgit"', "line 8, model.link", 'did you mean "logit"'),
        ('event = "yes"', "line 8, model.event", 'with family = "bernoulli"'),
        ('exposure = "days"', "line 8, model.exposure", 'with family = "poisson"'),
        ('main_prior = "weka"', "line 8, model.main_prior", 'did you mean "weak"'),
        ("level = 95", "line 8, model.level", "such as 0.95 for 95 %"),
        ("level = nan", "line 8, model.level", "out of range"),
        ("main_prior = 3", "line 8, model.main_prior", "found a number, 3"),
        ("[computation]\ndraws = 10", "line 9, computation.draws", "numbers of at least 250"),
        ("[computation]\ndraws = 300.5", "line 9, computation.draws", "a whole number"),
        ("[computation]\nseed = 2026-11-04", "line 9, computation.seed", "found a date or time"),
        ('[[question]]\nname = "a"', "line 8, question no. 1, effect", "`effect` is missing in [[question]]"),
        ('[question]\nname = "a"', "line 8, question", "a double header"),
    ],
)
def test_wrong_values_are_named(folder: Path, addition: str, place: str, words: str) -> None:
    """A wrong value is reported on its line with what is allowed."""
    assert words in problems(write(folder, GOOD + addition + "\n"))[place]


PRIOR = '[[prior]]\nname = "informed"\nsource = "pilot"\n'


@pytest.mark.parametrize(
    ("line", "place", "words"),
    [
        ('terms."a[b]" = { dist = "norml", sd = 1 }', 'terms."a[b]"', 'did you mean dist = "normal"'),
        ("terms.x = { mean = 1 }", "terms.x", "has no `dist`"),
        ('terms.x = { dist = "normal" }', "terms.x.sd", "`sd` is missing"),
        ('terms.x = { dist = "normal", sd = -1 }', "terms.x.sd", "numbers above 0"),
        ('terms.x = { dist = "normal", sd = inf }', "terms.x.sd", "a finite number"),
        (
            'terms.x = { dist = "normal", sd = 1, men = 1 }',
            "terms.x.men",
            "unknown key `men` in a normal distribution",
        ),
        ('terms.x = { dist = "uniform", low = 2, high = 1 }', "terms.x", "low must be below high"),
        ("terms.x = 3", "terms.x", "a table of keys and values"),
        ('auxiliary.sigma = { dist = "normal", sd = 1 }', "auxiliary.sigma", "cannot be negative"),
    ],
)
def test_wrong_priors_are_named(folder: Path, line: str, place: str, words: str) -> None:
    """A wrong distribution is reported at its key, without pydantic's own words."""
    found = problems(write(folder, GOOD + PRIOR + line + "\n"))

    assert words in found[f"line 11, prior no. 1, {place}"]


def test_an_unknown_distribution_lists_the_allowed_ones(folder: Path) -> None:
    """The message for an unknown `dist` names every distribution."""
    found = problems(write(folder, GOOD + PRIOR + 'terms.x = { dist = "beta" }\n'))

    assert "flat, normal, student_t, cauchy" in found["line 11, prior no. 1, terms.x"]


def test_names_are_unique_and_not_reserved(folder: Path) -> None:
    """Questions and prior sets need names of their own; the built-in ones are taken."""
    text = GOOD + (
        '[[question]]\nname = "Film"\neffect = "a"\n[[question]]\nname = "film"\neffect = "b"\n'
        '[[prior]]\nname = "Weak"\nsource = "s"\n'
        '[[prior]]\nname = "mine"\nsource = "s"\n[[prior]]\nname = "mine"\nsource = "s"\n'
    )

    found = problems(write(folder, text))

    assert "already the name of question no. 1" in found["line 12, question no. 2, name"]
    assert "built-in prior set" in found["line 15, prior no. 1, name"]
    assert "already the name of prior set no. 2" in found["line 21, prior no. 3, name"]
    assert len(found) == 3


@pytest.mark.parametrize(
    ("levels", "words"),
    [
        ('["none"]', "1 level declared"),
        ('["none", "film", "none"]', '"none" declared more than once'),
        ('["none", " film"]', "has blanks around it"),
        ('["none", "NA"]', "also in `missing_values`"),
    ],
)
def test_levels_make_a_factor(folder: Path, levels: str, words: str) -> None:
    """Declared levels are two or more, all different, and none of them means missing."""
    text = GOOD.replace('["none", "film"]', levels).replace("[model]", 'missing_values = ["NA"]\n[model]')

    assert words in problems(write(folder, text))["line 4, data.levels.liner"]


def test_encoding_and_sheet_must_make_sense(folder: Path) -> None:
    """An unknown encoding, and a sheet of a file without sheets, are reported together."""
    found = problems(write(folder, GOOD.replace("[model]", 'encoding = "utf-99"\nsheet = "A"\n[model]')))

    assert "not a text encoding" in found["line 5, data.encoding"]
    assert "has no sheets" in found["line 6, data.sheet"]


@pytest.mark.parametrize("name", ["base64", "a\\u0000b", "undefined-8"])
def test_codecs_that_are_not_text_are_refused(folder: Path, name: str) -> None:
    """Only text encodings can be named."""
    found = problems(write(folder, GOOD.replace("[model]", f'encoding = "{name}"\n[model]')))

    assert "not a text encoding" in found["line 5, data.encoding"]


def test_a_syntax_error_has_its_line(folder: Path) -> None:
    """Text that is not TOML is reported where the parser stopped."""
    assert "not valid TOML" in problems(write(folder, GOOD.replace('"Firmness"', "Firmness")))["line 1"]
    assert "not valid TOML" in problems(write(folder, GOOD + "x = ["))["line 8"]
    assert "not valid TOML" in problems(write(folder, "x = " + "9" * 5000))[""]


def test_deep_nesting_is_refused(folder: Path) -> None:
    """A file made to exhaust the parser gets a message, not a traceback."""
    assert "nested too deeply" in problems(write(folder, "x = " + "[" * 50_000))[""]


def test_other_encodings_are_refused(folder: Path) -> None:
    """Latin-1 and UTF-16 study files are named as such."""
    path = folder / "firmness.toml"
    path.write_bytes(GOOD.replace("Firmness", "Qualität").encode("latin-1"))
    assert "not UTF-8" in problems(path)["line 1"]

    path.write_bytes(GOOD.encode("utf-16"))
    assert "not UTF-8" in problems(path)["line 1"]


def test_files_that_are_not_study_files(folder: Path) -> None:
    """A missing file, a folder, an empty and an over-large file each say so."""
    assert "no such file" in problems(folder / "nothing.toml")[""]
    assert "this is a folder" in problems(folder)[""]
    assert "larger than 1,000,000 bytes" in problems(write(folder, "#" * (MAX_STUDY_BYTES + 1)))[""]
    assert set(problems(write(folder, ""))) == {"title", "data", "model"}


def data_problem(folder: Path, name: str, *, allow_outside: bool = False) -> str:
    """Text of the one problem with this data file."""
    path = write(folder, GOOD.replace("firmness.csv", name))
    return problems(path, allow_outside=allow_outside)["line 3, data.file"]


@pytest.mark.parametrize("name", ["https://example.org/a.csv", "s3://bucket/a.csv", "file:///etc/a.csv"])
def test_addresses_are_refused(folder: Path, name: str) -> None:
    """Nothing is ever fetched."""
    assert "is an address" in data_problem(folder, name)


def test_the_data_file_stays_in_the_folder(folder: Path) -> None:
    """Path traversal, absolute paths and symbolic links do not lead out of the study's folder."""
    outside = folder.parent / "secret.csv"
    outside.write_text("a\n1\n", encoding="utf-8")
    (folder / "link.csv").symlink_to(outside)
    (folder / "loop.csv").symlink_to(folder / "loop.csv")

    for name in ("../secret.csv", "../absent.csv", str(outside), "link.csv", "sub/../../secret.csv"):
        message = data_problem(folder, name)
        assert "outside the study's folder" in message
        assert "--allow-outside" in message
    assert "cannot be followed" in data_problem(folder, "loop.csv")


def test_allow_outside_permits_it(folder: Path) -> None:
    """The switch opens the way out, and only that: a missing file is still missing."""
    outside = folder.parent / "other.csv"
    outside.write_text("a\n1\n", encoding="utf-8")
    path = write(folder, GOOD.replace("firmness.csv", "../other.csv"))

    assert load_study(path, allow_outside=True).data_path == outside.resolve()
    assert "there is no file" in data_problem(folder, "../absent.csv", allow_outside=True)


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("absent.csv", "there is no file"),
        ("firmness.pkl", "not a known data format"),
        ("firmness", "not a known data format"),
        ("firmness.csv.zip", ".csv.gz"),
        ("folder.csv", "is a folder"),
        ("x" * 300 + ".csv", "cannot be followed"),
        ("a\\u0000b.csv", "cannot be followed"),
    ],
)
def test_data_files_that_cannot_be_read(folder: Path, name: str, words: str) -> None:
    """What the study names must be an ordinary file in a known format."""
    (folder / "folder.csv").mkdir()

    assert words in data_problem(folder, name)


def test_a_link_cannot_disguise_a_format(folder: Path) -> None:
    """A link with a known ending to a file with another is refused."""
    (folder / "data.pkl").write_bytes(b"x")
    (folder / "data.csv").symlink_to(folder / "data.pkl")

    assert "not a known data format" in data_problem(folder, "data.csv")


def test_json_schema_describes_the_file() -> None:
    """Editors get all sections and know that other keys are wrong."""
    schema = json_schema()

    assert schema["additionalProperties"] is False
    assert set(schema["required"]) == {"title", "data", "model"}
    assert "missing_values" in schema["$defs"]["DataSpec"]["properties"]


def test_reading_a_study_loads_nothing_heavy() -> None:
    """The room imports no numerical library, so that checking a study is instant."""
    code = (
        "import sys, reanalysis.study.read, reanalysis.study.formula;"
        "print(sorted({'numpy', 'pandas', 'scipy', 'formulae', 'pyarrow', 'openpyxl'} & set(sys.modules)))"
    )
    root = Path(__file__).resolve().parents[2]
    done = subprocess.run(  # noqa: S603 (our own interpreter and code)
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=root
    )

    assert done.stdout.strip() == "[]"


PIECES = [
    "[",
    "]",
    "{",
    "}",
    '"',
    "'",
    "=",
    ".",
    ",",
    "\n",
    "#",
    "\\",
    "0",
    "a",
    "\x00",
    "ä",
    "[[prior]]\n",
    '"""',
    "dist",
]


@given(
    st.lists(
        st.tuples(st.integers(0, 400), st.integers(0, 6), st.sampled_from(PIECES)), min_size=1, max_size=5
    )
)
def test_damaged_files_give_a_study_or_a_study_error(edits: list[tuple[int, int, str]]) -> None:
    """Whatever is cut from or put into a study file, no other exception comes out."""
    text = GOOD + PRIOR + 'terms."a[b]" = { dist = "normal", sd = 1.0 }\n'
    for start, length, piece in edits:
        text = text[:start] + piece + text[start + length :]
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "firmness.csv").touch()
        path = write(Path(folder), text)
        with contextlib.suppress(StudyError):
            assert load_study(path).spec.model.family == "gaussian"


def test_the_formula_is_checked_with_everything_else(folder: Path) -> None:
    """Code in the formula is one problem among the others, at its line and with the place marked."""
    found = problems(write(folder, GOOD.replace("~ liner", "~ liner.upper()") + "[oddity]\n"))

    assert set(found) == {"line 6, model.formula", "line 8, oddity"}
    assert "firmness ~ liner.upper()" in found["line 6, model.formula"]
    assert "^" in found["line 6, model.formula"]


def test_places_of_keys_are_kept_for_later_stages(folder: Path) -> None:
    """A later stage can say at which line of which file a key stands."""
    question = '[[question]]\nname = "q"\neffect = "liner[film]"\n'
    study = load_study(write(folder, GOOD + question))

    assert study.places["question no. 1, effect"] == "firmness.toml, line 10, question no. 1, effect"
    assert study.places["model.family"] == "firmness.toml, line 7, model.family"
