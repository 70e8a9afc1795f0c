"""What is asked: reagents of a reaction, checked and read once."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal, get_args

from ringstrain.errors import RingstrainError, UsageError
from ringstrain.structure.read import read
from ringstrain.structure.records import Structure

Base = Literal["small", "bulky"]
Reagent = Literal[
    "base",
    "metal",
    "small hydride",
    "bulky hydride",
    "organometal",
    "thin carbon",
    "cyanide",
    "sulfoxonium ylide",
    "sulfonium ylide",
    "dissolving metal",
    "equilibrating",
    "bulky alkoxide",
    "iridium",
    "electrode",
    "lithium enolate",
    "equilibrated enolate",
    "enamine",
    "azaenolate",
    "bromonium",
    "peracid",
    "vanadyl",
    "acid",
    "nucleophile",
    "acyl transfer",
    "hydrolysis",
    "chromic acid",
    "hypervalent",
    "periodate",
    "lead tetraacetate",
]
REAGENTS: tuple[str, ...] = get_args(Reagent)


@dataclass(frozen=True, kw_only=True)
class Request:
    """Reagents of a reaction.

    Attributes
    ----------
    nucleophile
        SMILES of the nucleophile, bonding atom first; empty when none was given.
    base
        Size of the base.
    reagent
        Class of reagent; empty for the usual one of the reaction.
    electrophile
        SMILES of the electrophile (halogen, alkyl or acyl group), bonding atom first; empty for the usual one.
    """

    nucleophile: str = ""
    base: Base | None = None
    reagent: str = ""
    electrophile: str = ""

    def __post_init__(self) -> None:
        if self.reagent and self.reagent not in REAGENTS:
            raise UsageError(f"No reagent class is called {self.reagent!r}.", f"Use one of {', '.join(REAGENTS)}.")

    @property
    def base_size(self) -> Base:
        """Size of the base, small when not given."""
        return self.base or "small"

    @cached_property
    def nucleophile_part(self) -> Structure | None:
        """The nucleophile, None for hydride or when none was given.

        Raises
        ------
        UsageError
            If it cannot be read.
        """
        if not self.nucleophile or self.is_hydride:
            return None
        return read_part(self.nucleophile, "--nucleophile")

    @property
    def is_hydride(self) -> bool:
        """True when the nucleophile is a hydride."""
        return self.nucleophile.strip("[]+-") in ("H", "HH", "AlH4", "BH4")

    def part_or(self, text: str) -> Structure:
        """The nucleophile, or another one when none was given."""
        return self.nucleophile_part or read_part(text, "--nucleophile")

    def electrophile_or(self, text: str) -> Structure:
        """The electrophile, or another one when none was given."""
        return read_part(self.electrophile or text, "--electrophile")


def read_part(text: str, option: str) -> Structure:
    """A reagent read as a structure.

    Raises
    ------
    UsageError
        If it is none.
    """
    try:
        part = read(text)
    except RingstrainError as error:
        raise UsageError(
            f"{option} {text!r} is no structure: {error.problem}",
            "Write it with the bonding atom first, such as Br, O, N, OC or C#N.",
        ) from None
    if not part.atoms or len(part.fragment) != len(part.atoms):
        raise UsageError(f"{option} {text!r} has several parts.", "Leave counter-ions out.")
    return part


def make_request(*, nucleophile: str = "", base: str = "", reagent: str = "", electrophile: str = "") -> Request:
    """Reagents from words, checked and read at once.

    Raises
    ------
    UsageError
        If one is unknown or cannot be read.
    """
    size: Base | None = None
    for known in get_args(Base):
        if base == known:
            size = known
    if base and size is None:
        raise UsageError(f"No base is called {base!r}.", "Use small or bulky.")
    request = Request(nucleophile=nucleophile, base=size, reagent=reagent, electrophile=electrophile)
    if nucleophile and not request.is_hydride:
        request.part_or(nucleophile)
    if electrophile and electrophile.strip("[]+-") not in ("H", "HH"):
        request.electrophile_or(electrophile)
    return request
