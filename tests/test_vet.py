"""Checking profile files: each mistake is told with its file, line, key and what to do.

Every file in data/bad begins with the problems it has, a line each after "#!".
"""

from __future__ import annotations

import os
import random
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tankcalc.cli.main import main
from tankcalc.errors import ProfileError
from tankcalc.profiles import files_to_vet, find_site, load_site, vet
from tankcalc.profiles.documents import LARGEST_BYTES
from tankcalc.profiles.findings import MOST
from tankcalc.profiles.vetting import vet_file
from tankcalc.text import clean

BAD = Path(__file__).parent / "data" / "bad"
GOOD = find_site()[0]
BAD_FILES = sorted(path for path in BAD.glob("*/*.toml") if path.stem != "gas-oil")

SPHERE = '[shape]\nkind = "sphere"\ndiameter = "12 m"\n'


def expected(path: Path) -> list[str]:
    """The problems that a file says it has, as they are printed."""
    said = [line[3:] for line in path.read_text().splitlines() if line.startswith("#! ")]
    name = f"{path.parent.name}/{path.name}"
    return [
        line if line.startswith("tanks/") else f"{name}:{'' if line[0].isdigit() else ' '}{line}"
        for line in said
    ]


@pytest.mark.parametrize("path", BAD_FILES, ids=lambda path: f"{path.parent.name}/{path.stem}")
def test_a_mistake_is_told_with_its_line_key_and_advice(path: Path) -> None:
    assert [str(problem) for problem in vet_file(path, BAD)] == expected(path)


def test_there_is_a_file_for_every_kind_of_mistake() -> None:
    assert len(BAD_FILES) > 140
    assert all(expected(path) for path in BAD_FILES)


@pytest.mark.parametrize("path", BAD_FILES, ids=lambda path: f"{path.parent.name}/{path.stem}")
def test_a_line_that_is_named_holds_the_key(path: Path) -> None:
    lines = path.read_text().splitlines()
    for problem in vet_file(path, BAD):
        words = problem.key.split(".")
        in_this_file = problem.file == f"{path.parent.name}/{path.name}"
        is_there = "missing" not in problem.what and not any(word.isdigit() for word in words)
        if problem.line is not None and in_this_file and is_there:
            assert words[-1] in lines[problem.line - 1]


def test_what_vet_finds_loading_refuses_with_all_of_it(tmp_path: Path) -> None:
    write(tmp_path, "tanks/T-9.toml", (BAD / "tanks" / "several.toml").read_text())
    site = load_site(site_in(tmp_path))
    with pytest.raises(ProfileError) as refused:
        site.tank("T-9")
    assert len(refused.value.problems) == 7
    assert 'servise: unknown key. Did you mean "service"?' in str(refused.value)


def test_a_doubt_does_not_keep_a_tank_from_being_used(tmp_path: Path) -> None:
    below = f'{SPHERE}\n[transmitters.p1]\nelevation = "-0.5 m"\nreads = "gauge"\n'
    path = write(site_in(tmp_path), "tanks/S-9.toml", below)
    assert "below the vessel's lowest point" in str(vet([path], tmp_path)[0])
    assert load_site(tmp_path).tank("S-9").transmitters["p1"].elevation_m == -0.5


@pytest.mark.parametrize(
    ("density", "said"),
    [
        ('model = "constant"\nvalue = "85 kg/m3"', "3: density.value: 85 kg/m3 is no usual"),
        ('model = "constant"\nvalue = "8500 kg/m3"', "3: density.value: 8500 kg/m3 is no usual"),
        (
            'model = "expansion"\nreference = "845 kg/m3"\nat = "15 degC"\n'
            'coefficient = "-8.3e-4 / K"',
            "5: density.coefficient: the liquid shrinks with warmth by 0.00083 per K",
        ),
        (
            'model = "expansion"\nreference = "845 kg/m3"\nat = "15 degC"\n'
            'coefficient = "8.3e-3 / K"',
            "5: density.coefficient: the liquid expands by 0.0083 per K",
        ),
        (
            'model = "table"\npoints = [["0 degC", "850 kg/m3"], ["9 degC", "780 kg/m3"]]',
            "3: density.points.2: the liquid expands",
        ),
        (
            'model = "samples"\npoints = [["0 m", "850 kg/m3"], ["9 m", "78 kg/m3"]]',
            "3: density.points: 78 kg/m3 is no usual",
        ),
    ],
)
def test_an_unlikely_liquid_is_told_and_can_be_used(
    tmp_path: Path, density: str, said: str
) -> None:
    path = write(site_in(tmp_path), "fluids/x.toml", f"[density]\n{density}\n")
    (problem,) = vet([path], tmp_path)
    assert str(problem).startswith(f"fluids/x.toml:{said}")
    assert load_site(tmp_path).fluid("x").layers


def test_usual_liquids_raise_no_doubt() -> None:
    assert vet([GOOD / "fluids"], GOOD) == []


def write(folder: Path, name: str, text: str | bytes) -> Path:
    path = folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(text.encode() if isinstance(text, str) else text)
    return path


def site_in(folder: Path) -> Path:
    write(folder, "site.toml", 'name = "Test Site"\n')
    return folder


@pytest.mark.parametrize(
    ("held", "message"),
    [
        (b"\xff\xfe[\x00s\x00", "tanks/T-9.toml:1: this is not UTF-8 text. Save it as UTF-8."),
        (b'name = "T-9"\nservice = "\xe9"\n', "tanks/T-9.toml:2: this is not UTF-8 text."),
        (b"a = " + b"[" * 5000, "lists or tables lie too deep in one another."),
        (b"a = " + b"9" * 5000, "a number has far too many digits."),
        (b"a." * 3000 + b"a = 1", "a key of the file has more than forty parts."),
        (b"#" * (LARGEST_BYTES + 1), "the file is larger than 2 MB."),
        (b"", "tanks/T-9.toml: shape: missing."),
        (b"\x00", "tanks/T-9.toml:1: not TOML at column 1"),
    ],
)
def test_a_file_that_cannot_be_read_is_told(tmp_path: Path, held: bytes, message: str) -> None:
    path = write(site_in(tmp_path), "tanks/T-9.toml", held)
    assert message in str(vet_file(path, tmp_path)[0])


def test_what_is_no_file_is_told(tmp_path: Path) -> None:
    site_in(tmp_path)
    (tmp_path / "tanks" / "T-8.toml").mkdir(parents=True)
    os.mkfifo(tmp_path / "tanks" / "T-9.toml")
    told = [str(problem) for problem in vet(None, tmp_path)]
    assert told == [
        "tanks/T-8.toml: this is a folder; a file is wanted.",
        "tanks/T-9.toml: this is no ordinary file.",
    ]
    (missing,) = vet([tmp_path / "tanks" / "T-7.toml"], tmp_path)
    assert str(missing) == "tanks/T-7.toml: there is no such file."


def test_a_name_no_file_can_have_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["vet", "9" * 5000 + ".toml"]) == 2
    assert ": cannot be read: File name too long." in capsys.readouterr().out
    assert str(vet([Path("a\x00b.toml")], GOOD)[0]) == "ab.toml: there is no such file."
    assert main(["vet", ""]) == 2
    assert "one of the paths is empty" in capsys.readouterr().err


def test_a_file_closed_to_this_user_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = write(site_in(tmp_path), "tanks/T-9.toml", SPHERE)

    def closed(_path: Path) -> bytes:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "read_bytes", closed)
    assert str(vet_file(path, tmp_path)[0]) == (
        "tanks/T-9.toml: cannot be read: Permission denied."
    )


def test_a_byte_order_mark_and_foreign_line_ends_are_read(tmp_path: Path) -> None:
    marked = b"\xef\xbb\xbf" + SPHERE.replace("\n", "\r\n").encode()
    assert vet([write(site_in(tmp_path), "tanks/S-9.toml", marked)], tmp_path) == []


def test_a_file_with_many_problems_lists_the_first(tmp_path: Path) -> None:
    rows = "".join(f'  ["{n} m", "{n}"],\n' for n in range(300))
    text = f'[shape]\nkind = "strapped"\ntable = [\n{rows}]\n'
    told = vet([write(site_in(tmp_path), "tanks/X-9.toml", text)], tmp_path)
    assert len(told) == MOST + 1
    assert told[0].line == 4
    assert str(told[-1]) == ("tanks/X-9.toml: 280 more problems are not listed. Mend these first.")


def test_empty_tables_and_lists_have_a_line(tmp_path: Path) -> None:
    text = (
        'deadwood = {}\n\n[shape]\nkind = "stack"\nsections = []\n\n'
        "[limits]\n\n[transmitters]\np1 = {}\n"
    )
    told = vet([write(site_in(tmp_path), "tanks/X-9.toml", text)], tmp_path)
    assert [(problem.key, problem.line) for problem in told] == [
        ("deadwood", 1),
        ("shape.sections", 5),
        ("transmitters.p1.elevation", 10),
        ("transmitters.p1.reads", 10),
    ]


def test_arrays_of_tables_dotted_and_quoted_keys_have_their_line(tmp_path: Path) -> None:
    text = (
        '"name" = "X-9"\nshape.kind = "sphere"\nshape.diameter = "12 m"\n'
        'transmitters.p1 = { elevation = "0 m", reads = "gauge", range = ["0 kPa", "9"] }\n'
        '\n[[deadwood]]\nbottom = "1 m"\ntop = "2 m"\nvolume = "1 m3"\n'
        '\n[[deadwood]]\nbottom = "1 m"\n"top" = "2"\nvolume = "1 m3"\nheight = "1 m"\n'
    )
    told = vet([write(site_in(tmp_path), "tanks/X-9.toml", text)], tmp_path)
    assert [(problem.key, problem.line) for problem in told] == [
        ("transmitters.p1.range.2", 4),
        ("deadwood.2.top", 13),
        ("deadwood.2.height", 15),
    ]


def test_a_file_outside_of_a_site_is_known_by_what_it_holds(tmp_path: Path) -> None:
    tank = write(tmp_path, "new.toml", SPHERE.replace("diameter", "diametre"))
    fluid = write(tmp_path, "liquid.toml", '[density]\nmodel = "watr"\n')
    neither = write(tmp_path, "other.toml", 'colour = "red"\n')
    told = [str(problem) for problem in vet([tank, fluid, neither], GOOD)]
    assert told[0].endswith('new.toml:3: shape.diametre: unknown key. Did you mean "diameter"?')
    assert told[1].endswith(
        'liquid.toml:2: density.model: "watr" is no model known here. Did you mean "water"?'
    )
    assert told[2].endswith(
        "other.toml: this is no site, tank or fluid file. "
        "A tank has [shape], a fluid [density] or [[layer]]."
    )


def test_a_site_without_its_file_is_told(tmp_path: Path) -> None:
    write(tmp_path, "tanks/S-9.toml", SPHERE)
    assert [str(problem) for problem in vet([tmp_path], tmp_path)] == [
        "site.toml: there is no such file."
    ]


def test_a_capacity_table_is_not_a_profile(tmp_path: Path) -> None:
    path = write(site_in(tmp_path), "tanks/X-9.csv", "level [m], volume [m3]\n")
    assert str(vet([path], tmp_path)[0]) == (
        "tanks/X-9.csv: a profile's name ends in .toml. "
        "A capacity table is checked with the tank that names it."
    )


def test_a_file_name_that_cannot_be_shown_is_told_and_left_out(tmp_path: Path) -> None:
    write(site_in(tmp_path), "tanks/S\x1b[31m9.toml", SPHERE)
    (problem,) = vet(None, tmp_path)
    assert str(problem) == (
        "tanks/S[31m9.toml: the file's name holds characters that cannot be shown. Rename it."
    )
    assert load_site(tmp_path).tank_names() == []


def test_each_file_is_checked_once(tmp_path: Path) -> None:
    path = write(site_in(tmp_path), "tanks/S-9.toml", SPHERE)
    assert files_to_vet([tmp_path, path], tmp_path) == [tmp_path / "site.toml", path]


def test_vet_prints_problems_and_counts_them(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    write(site_in(tmp_path), "tanks/S-9.toml", SPHERE.replace("diameter", "diametre"))
    assert main(["vet", str(tmp_path)]) == 2
    out, err = capsys.readouterr()
    assert out == 'tanks/S-9.toml:3: shape.diametre: unknown key. Did you mean "diameter"?\n'
    assert err == "2 files, 1 problem\n"


def test_vet_of_a_sound_site_says_so(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write(site_in(tmp_path), "tanks/S-9.toml", SPHERE)
    for words in (["vet", str(tmp_path)], ["vet", "--profiles", str(tmp_path)]):
        assert main(words) == 0
        assert capsys.readouterr() == ("", "2 files, no problems\n")


def test_vet_of_an_empty_folder_is_an_error(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["vet", str(tmp_path)]) == 2
    assert "no profile files" in capsys.readouterr().err


SEEDS = {
    "tanks": sorted((GOOD / "tanks").glob("*.toml")),
    "fluids": sorted((GOOD / "fluids").glob("*.toml")),
    ".": [GOOD / "site.toml"],
}
POISON = (
    "\x1b[31m", "\x00", '"', "'", '"""', "[", "]", "[[", "{", "}", "=", "\\", "\\u0000",
    "\\u001b[2J", "\u202e", "９", "1e999", "nan", "inf", "-inf", "true", "2026-01-01", "0x7f",
    "9" * 4000, "a.b.c.d", "[bold]", "%s%n", "../../etc/passwd", "1_000", "12 m", '"-1 m"', '"0 m"',
    '"1e300 m"', "[]", "{}", '["", ""]', "[[]]", "null", "#", "\r", "\t", "🛢", "=HYPERLINK(1)",
)  # fmt: skip


def spoilt(text: str, chance: random.Random) -> str:
    """A profile with a few of its words, lines and characters put out of order."""
    for _ in range(chance.randint(1, 4)):
        lines = text.split("\n")
        at = chance.randrange(len(lines))
        match chance.randrange(6):
            case 0:
                lines.insert(chance.randrange(len(lines)), lines[at])
            case 1:
                del lines[at]
            case 2:
                lines[at] = lines[at].split("=")[0] + "= " + chance.choice(POISON)
            case 3:
                where = chance.randrange(len(lines[at]) + 1)
                lines[at] = lines[at][:where] + chance.choice(POISON) + lines[at][where:]
            case 4:
                other = chance.randrange(len(lines))
                lines[at], lines[other] = lines[other], lines[at]
            case 5:
                lines[at] = lines[at].replace('"', "", 1)
        text = "\n".join(lines)
    return text


@pytest.mark.parametrize("kind", SEEDS)
def test_hundreds_of_spoilt_files_are_each_a_clear_answer(tmp_path: Path, kind: str) -> None:
    chance = random.Random(f"spoilt {kind}")
    site_in(tmp_path)
    for _ in range(40 if kind == "." else 200):
        text = spoilt(chance.choice(SEEDS[kind]).read_text(), chance)
        name = "site.toml" if kind == "." else f"{kind}/spoilt.toml"
        path = write(tmp_path, name, text.encode("utf-8", "surrogatepass"))
        for problem in vet_file(path, GOOD):
            assert problem.what
            assert clean(str(problem), 2000) == str(problem)


@pytest.mark.parametrize(
    "text",
    [
        "x = [" + "1," * 200_000 + "]",
        "shape = [" + "{}," * 100_000 + "]",
        '[shape]\nkind = "strapped"\ntable = [' + "1," * 200_000 + "]",
        "".join(f"[k{n}]\n" for n in range(40_000)),
        "[[deadwood]]\n" * 40_000,
        'name = "' + "x" * 1_900_000 + '"',
        "x" * 1_900_000,
    ],
    ids=["ones", "tables", "rows", "headers", "pieces", "name", "word"],
)
def test_a_file_made_to_be_slow_is_answered_all_the_same(tmp_path: Path, text: str) -> None:
    path = write(site_in(tmp_path), "tanks/T-9.toml", text)
    start = time.process_time()
    assert vet_file(path, tmp_path)
    assert time.process_time() - start < 20.0


def test_a_process_leaves_with_its_code_and_no_traceback(tmp_path: Path) -> None:
    write(site_in(tmp_path), "tanks/T-9.toml", "[" * 3000)
    done = subprocess.run(
        [sys.executable, "-m", "tankcalc", "vet", str(tmp_path)], capture_output=True, text=True
    )
    assert done.returncode == 2
    assert done.stdout.startswith("tanks/T-9.toml")
    assert "Traceback" not in done.stderr
