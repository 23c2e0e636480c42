"""Hostile words, units, files and control characters: a clear error each, and nothing else."""

from __future__ import annotations

import random
from pathlib import Path

import pytest
from sites import OIL, SITE, TANK, make_site, run

from tankcalc.cli.main import main

POISON = (
    "\x1b[31mred",
    "\x1b]0;title\x07",
    "\x9b2J",
    "\x00",
    "[/]",
    "[bold]x[/bold]",
    "[@click=app.quit]x[/]",
    "\u202e321",
    "\u200b5 m",
    "5 m",
    "９８ kPa",
    "9" * 5000 + " kPa",
    "1e999 kPa",
    "-1e308 kPa",
    "nan kPa",
    "inf bar",
    "9**9**9 kPa",
    "m**9**9**9",
    "(" * 3000,
    "__import__('os').system('true')",
    "%s%s%n",
    "{0.__class__}",
    "../../../../etc/passwd",
    "-",
    "--",
    "'; DROP TABLE entry; --",
    "5 m\n6 m",
    "½ m",
    "1,234,567 kPa",
    "1.2.3 bar",
    "5 furlongs",
    "5 gal",
    "5 ton",
    "5 mpa",
    "0x10 kPa",
    "1_000 kPa",
    "kPa",
    "",
    " ",
    "\ufffd",
    "=HYPERLINK(1)",
    "<script>",
    "🛢 5 m",
    "5 m" + "\u0301" * 100,
)
OPTIONS = ("--p1", "--level", "--temperature", "--density", "--volume", "--barometer", "--fluid")


def assert_inert(text: str) -> None:
    """Assert that a terminal would do nothing with a text but print it."""
    assert "Traceback" not in text
    odd = [ch for ch in text if ch != "\n" and (ord(ch) < 32 or 127 <= ord(ch) < 160)]
    assert not odd, repr(text)
    assert not any(ch in text for ch in "\u202e\u200b\u2066")


@pytest.mark.parametrize("option", OPTIONS)
def test_hostile_readings_through_convert(
    option: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    site = str(make_site(tmp_path / "site"))
    for poison in POISON:
        words = ["--profiles", site, "convert", "V-1", f"{option}={poison}"]
        if option != "--level":
            words += ["--level", "5 m"]
        try:
            code = main(words)
        except SystemExit as left:
            code = int(str(left.code))
        out, err = capsys.readouterr()
        assert_inert(out + err)
        assert code in (0, 2, 3)
        if code:
            assert err, poison


@pytest.mark.parametrize("word", ["convert", "strap", "vet", "nonsense"])
def test_hostile_names_and_folders(
    word: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    site = str(make_site(tmp_path / "site"))
    for poison in POISON:
        if word == "vet" and poison == "--":
            continue  # ends the options; no path follows, so the whole site is checked
        try:
            code = main(["--profiles", site, word, poison])
        except SystemExit as left:
            code = int(str(left.code))
        out, err = capsys.readouterr()
        assert_inert(out + err)
        assert code == 2, (word, poison)


def broken_files() -> list[tuple[str, bytes]]:
    """Site files, each spoiled in one way by a seeded hand."""
    rng = random.Random(7)
    originals = {"site.toml": SITE, "tanks/V-1.toml": TANK, "fluids/oil.toml": OIL}
    made: list[tuple[str, bytes]] = []
    for name, text in originals.items():
        data = text.encode()
        for _ in range(30):
            at = rng.randrange(len(data))
            made.append((name, data[:at] + rng.randbytes(rng.randrange(1, 6)) + data[at:]))
            made.append((name, data[: rng.randrange(len(data))]))
        values = [line for line in text.splitlines() if " = " in line]
        for _ in range(40):
            line = rng.choice(values)
            poison = rng.choice(POISON).replace("\\", "").replace('"', "").replace("\n", " ")
            spoiled = line.split(" = ")[0] + f' = "{poison}"'
            made.append((name, text.replace(line, spoiled).encode("utf-8", "surrogateescape")))
        made.append((name, b"a = " + b"[" * 5000 + b"]" * 5000))
        made.append((name, b"a = " + b"9" * 6000))
        made.append((name, b"\xff\xfe\x00"))
    return made


def test_hostile_files_through_vet(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    site = make_site(tmp_path / "site")
    for name, data in broken_files():
        kept = (site / name).read_bytes()
        (site / name).write_bytes(data)
        code = main(["--profiles", str(site), "vet", str(site)])
        out, err = capsys.readouterr()
        assert_inert(out + err)
        assert code in (0, 2)
        if code:
            assert name.rsplit("/", 1)[-1] in out + err
        (site / name).write_bytes(kept)


def test_bytes_that_are_no_text_on_a_command_line(tmp_path: Path) -> None:
    site = str(make_site(tmp_path / "site"))
    done = run(tmp_path, "--profiles", site, "convert", "V-1", "--p1", b"98.2 \xb0kPa")
    assert done.returncode == 2
    assert_inert(done.stdout + done.stderr)
