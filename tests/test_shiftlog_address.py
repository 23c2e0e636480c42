"""Which log a site's entries go to, and which addresses are refused."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import platformdirs
import pytest
from shiftlog_samples import TEXTS, python, sample

from tankcalc.errors import InputError, StoreUnavailableError
from tankcalc.shiftlog import default_log, log_address, open_store


@dataclass(frozen=True)
class Site:
    folder: Path = Path("/sites/skerry")
    name: str = "Skerry Point Terminal"
    log_store: str | None = None


@pytest.fixture(autouse=True)
def no_variable(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("TANKCALC_LOG", raising=False)


def test_the_first_that_names_a_log_wins(monkeypatch: pytest.MonkeyPatch) -> None:
    site = Site(log_store="site.sqlite")
    assert log_address(None, site) == "/sites/skerry/site.sqlite"
    monkeypatch.setenv("TANKCALC_LOG", "variable.sqlite")
    assert log_address(None, site) == "variable.sqlite"
    assert log_address("option.sqlite", site) == "option.sqlite"
    monkeypatch.setenv("TANKCALC_LOG", "  ")
    assert log_address(None, site) == "/sites/skerry/site.sqlite"


@pytest.mark.parametrize("store", [None, "", "sqlite"])
def test_the_default_is_a_file_of_the_site_in_the_users_data_folder(store: str | None) -> None:
    expected = Path(platformdirs.user_data_dir("tankcalc")) / "skerry-point-terminal.sqlite"
    assert log_address(None, Site(log_store=store)) == str(expected)


def test_an_address_in_the_sites_file_is_no_path_in_its_folder() -> None:
    address = "postgresql://db.example/log"
    assert log_address(None, Site(log_store=address)) == address
    assert log_address(None, Site(log_store="/var/log/x.sqlite")) == "/var/log/x.sqlite"


def test_an_option_that_names_nothing_is_refused() -> None:
    with pytest.raises(InputError, match="names no file"):
        log_address(" ", Site())


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("A/B", "A B"),
        ("Ærø", "Oslo"),
        ("../../etc/passwd", "etc passwd"),
        ("漢字", "仮名"),
        ("x" * 70, "x" * 71),
        ("", " "),
        ("a\0b\n", "a b"),
        ("\udc80", "\udc81"),
    ],
)
def test_names_of_sites_make_harmless_files_that_differ(one: str, other: str) -> None:
    folder = default_log("x").parent
    paths = [default_log(name) for name in (one, other)]
    assert paths[0] != paths[1]
    for path in paths:
        assert path.parent == folder
        assert path.name.removesuffix(".sqlite").replace("-", "").isalnum()
        assert path.name.isascii()
        assert len(path.name) < 90


@pytest.mark.parametrize(
    ("address", "message"),
    [
        ("mysql://op:secret@db/log", "no log is kept at"),
        ("sqlite:///x", "no log is kept at"),
        ("a\0b", "no name for a file"),
        ("~no-such-user-here/x", "no such home folder"),
    ],
)
def test_addresses_this_version_has_no_store_for(address: str, message: str) -> None:
    with pytest.raises(StoreUnavailableError, match=message) as caught:
        open_store(address)
    assert "secret" not in str(caught.value)
    assert str(caught.value).isprintable()


@pytest.mark.parametrize(
    "name", ["a b.sqlite", "100%.sqlite", "what?x=1#y", "é.sqlite", "\udc80.db"]
)
def test_any_file_name_is_taken_as_it_is(tmp_path: Path, name: str) -> None:
    store = open_store(str(tmp_path / name))
    store.append(sample(), TEXTS)
    store.close()
    assert [path.name for path in tmp_path.iterdir()] == [name]
    assert store.where.isprintable()


def test_home_is_understood(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HOME", str(tmp_path))
    assert open_store("~/x.sqlite").where == str(tmp_path / "x.sqlite")


def test_importing_the_package_loads_no_database() -> None:
    code = (
        "import sys, tankcalc.shiftlog as log\n"
        "log.Entry, log.reading_entry, log.shift_at, log.parse_time, log.as_object\n"
        "heavy = {'sqlite3', 'numpy', 'pint', 'scipy', 'pydantic', 'textual', 'rich'}\n"
        "print(sorted(heavy & set(sys.modules)))\n"
    )
    output, errors = python(code).communicate(timeout=30)
    assert (output.strip(), errors) == ("[]", "")


def test_a_name_the_package_does_not_have_is_an_attribute_error() -> None:
    import tankcalc.shiftlog

    with pytest.raises(AttributeError, match="no attribute 'missing'"):
        _ = tankcalc.shiftlog.missing
    for name in tankcalc.shiftlog.__all__:
        assert getattr(tankcalc.shiftlog, name) is not None
