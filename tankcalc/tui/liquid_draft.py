"""A profile of a liquid as it is being typed: a model, its figures as text, where it is to go."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cache
from typing import TYPE_CHECKING, Any, NamedTuple

from tankcalc.errors import InputError
from tankcalc.profiles.density_schema import DENSITY
from tankcalc.profiles.documents import Document
from tankcalc.profiles.fluid_file import Origin, name_from
from tankcalc.profiles.names import SUFFIX
from tankcalc.profiles.site import FLUIDS
from tankcalc.profiles.tables import Key, Table
from tankcalc.tui import liquid_text

if TYPE_CHECKING:
    from tankcalc.profiles import Site

TEMPERATURE, NAME, FILE = "own-temperature", "own-name", "own-file"
MODEL = "model"
"""Where a problem belongs that is none of one figure."""


@dataclass(frozen=True, slots=True)
class DraftField:
    """One line to type in: its id, the label before it, what it takes, whether it must be there."""

    id: str
    label: str
    takes: str
    needed: bool = False


OWN_FIELDS = (
    DraftField(
        TEMPERATURE,
        "try at",
        'the liquid\'s temperature, "18 degC", or "1 m: 18 degC, 5 m: 21 degC"; it is not saved',
    ),
    DraftField(
        NAME, "shown name", "what operators see, up to 40 characters; empty: made of the file name"
    ),
    DraftField(FILE, "file name", "letters, digits, - and _, such as gas-oil-2"),
)


def models() -> list[str]:
    """Return the density models a fluid file can name."""
    return list(DENSITY.tables)


Path = tuple[str, ...]


def keys_of(model: str) -> dict[Path, Key]:
    """Return the keys that a model takes in ``[density]``; those of a table in it one by one."""
    return dict(_flat(DENSITY.tables[model], ()))


def _flat(table: Any, path: Path) -> Iterator[tuple[Path, Key]]:
    for name, key in table.keys.items():
        if isinstance(key.holds, Table):
            yield from _flat(key.holds, (*path, name))
        else:
            yield (*path, name), key


def id_of(path: Path) -> str:
    """Return the id of the field that a key is typed in."""
    return "-".join(("key", *path))


@cache
def fields_of(model: str) -> tuple[DraftField, ...]:
    """Return the fields of a model's keys; they are asked for with every key pressed."""
    return tuple(
        DraftField(id_of(path), path[-1].replace("_", " "), _takes(key), key.needed)
        for path, key in keys_of(model).items()
    )


class Began(NamedTuple):
    """What a draft held when it began."""

    model: str
    texts: Mapping[str, str]
    name: str
    stem: str


@dataclass(slots=True)
class LiquidDraft:
    """What was typed for one liquid; `origin` is the file it began from."""

    model: str = field(default_factory=lambda: models()[0])
    temperature: str = ""
    name: str = ""
    stem: str = ""
    origin: Origin | None = None
    _texts: dict[tuple[str, str], str] = field(default_factory=dict)
    _latest: dict[str, str] = field(default_factory=dict)
    began: Began = field(init=False)

    def __post_init__(self) -> None:
        self._latest = {id: text for (_, id), text in self._texts.items()}
        self.began = self._state()

    def fields(self) -> list[DraftField]:
        """Return what can be typed for the model, its own keys first."""
        return [*fields_of(self.model), *OWN_FIELDS]

    def text(self, id: str) -> str:
        """Return what a field holds."""
        match id:
            case "own-temperature":
                return self.temperature
            case "own-name":
                return self.name
            case "own-file":
                return self.stem
        return self._texts.get((self.model, id), "")

    def type(self, id: str, text: str) -> None:
        """Hold the text of a field."""
        match id:
            case "own-temperature":
                self.temperature = text
            case "own-name":
                self.name = text
            case "own-file":
                self.stem = text
            case _:
                self._texts[self.model, id] = self._latest[id] = text

    def turn(self, by: int) -> None:
        """Take another model; figures that fit there as well go along."""
        names = models()
        self.model = names[(names.index(self.model) + by) % len(names)]
        for path, key in keys_of(self.model).items():
            id = id_of(path)
            text = self._latest.get(id, "")
            if not text or self._texts.get((self.model, id)):
                continue
            if not liquid_text.problems_with(key.holds, liquid_text.meant(key.holds, text)):
                self._texts[self.model, id] = text

    def missing(self) -> list[str]:
        """Return the labels of the figures without which there is no density."""
        return [one.label for one in self.fields() if one.needed and not self.text(one.id).strip()]

    def stated(self) -> dict[str, Any]:
        """Return ``[density]`` as a file would state it."""
        stated: dict[str, Any] = {"model": self.model}
        for path, key in keys_of(self.model).items():
            text = self.text(id_of(path)).strip()
            if text:
                table = stated
                for name in path[:-1]:
                    table = table.setdefault(name, {})
                table[path[-1]] = liquid_text.meant(key.holds, text)
        return stated

    @property
    def in_place(self) -> bool:
        """Whether it goes back to the file it began from."""
        return self.origin is not None and self.origin.stem == self.stem.strip()

    @property
    def has_vapour(self) -> bool:
        """Whether the file it began from states what is above the liquid."""
        return self.origin is not None and self.origin.has_vapour

    @property
    def shown_name(self) -> str:
        """The name to be saved: as typed; a new file's own where it is still that of another."""
        typed = self.name.strip()
        if self.in_place:
            return typed
        inherited = self.origin is not None and typed == self.began.name.strip()
        return name_from(self.stem.strip()) if inherited or not typed else typed

    @property
    def changed(self) -> bool:
        """Whether leaving would lose something: the temperature to try at is no loss."""
        return self._state() != self.began

    def _state(self) -> Began:
        mine = {id: text for (of, id), text in self._texts.items() if of == self.model and text}
        return Began(self.model, mine, self.name, self.stem)


def opened(site: Site, stem: str) -> LiquidDraft:
    """Return the draft that begins from a fluid file of a site; of layers, from the uppermost.

    Raises
    ------
    InputError
        It names no density model known here.
    ProfileError
        It cannot be read as TOML, or is not there.
    """
    shown = f"{FLUIDS}/{stem}{SUFFIX}"
    document = Document(site.folder / FLUIDS / f"{stem}{SUFFIX}", shown)
    document.refuse()
    top = _uppermost(document.data)
    if top != stem and top in site.fluid_names():
        return _single(
            Document(site.folder / FLUIDS / f"{top}{SUFFIX}", f"{FLUIDS}/{top}{SUFFIX}"), top
        )
    return _single(document, stem)


def _uppermost(data: Mapping[str, Any]) -> str | None:
    """Return which liquid the last layer of a file is; None where it has no layers."""
    match data.get("layer"):
        case [*_, {"fluid": str(stem)}]:
            return stem
    return None


def _single(document: Document, stem: str) -> LiquidDraft:
    """Return the draft of a file that describes one liquid."""
    document.refuse()
    density = document.data.get("density")
    if not isinstance(density, dict) or density.get("model") not in models():
        raise InputError(f"{document.shown} names no density model known here.")
    name = document.data.get("name", "")
    texts = {}
    for path, key in keys_of(density["model"]).items():
        held = _held(density, path)
        if held is not None:
            texts[density["model"], id_of(path)] = liquid_text.shown(key.holds, held)
    return LiquidDraft(
        model=density["model"],
        name=name if isinstance(name, str) else "",
        stem=stem,
        origin=Origin(stem, document.held, "vapour" in document.data),
        _texts=texts,
    )


def _held(table: Any, path: Path) -> Any:
    """Return what a file holds under a path of keys; None where there is nothing."""
    for name in path:
        table = table.get(name) if isinstance(table, dict) else None
    return table


def _takes(key: Key) -> str:
    """Return what a key takes, and what it is where it is left empty."""
    takes = liquid_text.takes(key.holds)
    if key.needed:
        return takes
    given = f"; empty: {key.default}" if key.default is not None else "; may be left empty"
    return f"{takes}{given}"
