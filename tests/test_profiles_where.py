"""Which site folder is used: the first match wins, and a folder that is none is told."""

from __future__ import annotations

from pathlib import Path

import pytest

from tankcalc.errors import InputError
from tankcalc.profiles import find_site
from tankcalc.profiles.where import demo_folder


@pytest.fixture
def nobody(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The home of a user who has nothing yet."""
    monkeypatch.delenv("TANKCALC_PROFILES", raising=False)
    monkeypatch.delenv("XDG_CONFIG_HOME", raising=False)
    monkeypatch.setenv("HOME", str(tmp_path))
    return tmp_path


def a_site(folder: Path) -> Path:
    folder.mkdir(parents=True)
    (folder / "site.toml").write_text("")
    return folder


def test_the_first_match_wins(nobody: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert find_site() == (demo_folder(), True)
    mine = a_site(nobody / ".config" / "tankcalc")
    assert find_site() == (mine, False)
    named = a_site(nobody / "named")
    monkeypatch.setenv("TANKCALC_PROFILES", str(named))
    assert find_site() == (named, False)
    given = a_site(nobody / "given")
    assert find_site(str(given)) == (given, False)


def test_a_configuration_folder_without_a_site_is_passed_over(nobody: Path) -> None:
    (nobody / ".config" / "tankcalc").mkdir(parents=True)
    assert find_site() == (demo_folder(), True)


def test_an_empty_variable_counts_as_none(nobody: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TANKCALC_PROFILES", " ")
    assert find_site() == (demo_folder(), True)


def test_the_home_sign_is_read(nobody: Path) -> None:
    assert find_site("~/mine" if a_site(nobody / "mine") else "") == (nobody / "mine", False)


def test_the_demo_site_named_by_its_folder_is_still_the_demo() -> None:
    assert find_site(str(demo_folder()))[1]


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ("nowhere", "there is no such folder."),
        ("empty", "the folder holds no site.toml. A new site is begun with: tankcalc begin DIR"),
        ("file", "there is no such folder."),
        ("", "the folder holds no site.toml."),
        ("a\x00b", "there is no such folder."),
        ("~nobody-of-that-name/x", "cannot be read."),
        ("x" * 5000, "cannot be read."),
        ("\x1b[31m", "there is no such folder."),
    ],
)
def test_a_folder_that_is_no_site_is_told(
    nobody: Path, monkeypatch: pytest.MonkeyPatch, given: str, message: str
) -> None:
    (nobody / "empty").mkdir()
    (nobody / "file").write_text("")
    monkeypatch.chdir(nobody)
    with pytest.raises(InputError) as refused:
        find_site(given)
    assert message in str(refused.value)
    assert str(refused.value).startswith("--profiles ")
    assert not {"\x1b", "\x00"} & set(str(refused.value))


def test_a_variable_that_names_no_site_is_told(
    nobody: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("TANKCALC_PROFILES", str(nobody / "nowhere"))
    with pytest.raises(InputError, match=r"^\$TANKCALC_PROFILES .*there is no such folder"):
        find_site()
