"""What the price tables know of a substituent: its key, its class and the families that class belongs to."""

from __future__ import annotations

from dataclasses import dataclass, field

#: The classes a group can fall into, each with its wider families from near to far.
FAMILIES: dict[str, tuple[str, ...]] = {
    "methyl": ("alkyl", "carbon"),
    "primary alkyl": ("alkyl", "carbon"),
    "secondary alkyl": ("alkyl", "carbon"),
    "tertiary alkyl": ("alkyl", "carbon"),
    "linear carbon": ("carbon",),
    "acyl": ("flat carbon", "carbon"),
    "alkenyl": ("flat carbon", "carbon"),
    "aryl": ("flat carbon", "carbon"),
    "halogen": (),
    "oxy": ("oxygen", "oxygen or nitrogen"),
    "acyloxy": ("oxygen", "oxygen or nitrogen"),
    "silyloxy": ("oxygen", "oxygen or nitrogen"),
    "amino": ("nitrogen", "oxygen or nitrogen"),
    "amido": ("nitrogen", "oxygen or nitrogen"),
    "imino": ("nitrogen", "oxygen or nitrogen"),
    "nitro": ("nitrogen",),
    "ammonio": (),
    "sulfanyl": ("sulfur",),
    "sulfinyl": ("sulfur",),
    "sulfonyl": ("sulfur",),
    "phosphanyl": ("phosphorus",),
    "phosphoryl": ("phosphorus",),
    "phosphonio": ("phosphorus",),
    "silyl": ("group 14",),
    "germyl": ("group 14",),
    "stannyl": ("group 14",),
    "boryl": (),
    "oxo": (),
    "ylidene": (),
    "hydrogen": (),
    "other": (),
}
_ROUND = frozenset({"methyl", "halogen", "linear carbon", "hydrogen"})
_POLAR_FAMILIES = frozenset({"oxygen", "nitrogen", "sulfur", "phosphorus"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """A substituent as the price tables see it.

    Attributes
    ----------
    key
        Table key when the group is tabulated, else a label built from its class and formula.
    code
        Constitution (and side-chain configuration) as a number; equal groups have equal codes.
    mirror_code
        Code of the mirror image.
    kind
        Class name, a key of :data:`FAMILIES`.
    tabulated
        True when ``key`` is a key of groups.csv.
    round
        True when turning it about its bond changes nothing.
    polar
        True when its bond dipole matters to a neighbour.
    donor
        True when it can give a hydrogen bond from its first atom.
    acceptor
        True when its first atom can take one.
    ring_atom
        True when it is an atom of the same ring system (a fused or spiro neighbour).
    traits
        All that its prices depend on, in one word; groups without a row may share a key and differ in these.
    """

    key: str
    code: int
    mirror_code: int
    kind: str
    tabulated: bool
    round: bool = False
    polar: bool = False
    donor: bool = False
    acceptor: bool = False
    ring_atom: bool = False
    traits: str = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        marks = (self.tabulated, self.round, self.polar, self.donor, self.acceptor)
        traits = f"{self.key}/{self.kind}/" + "".join(["1" if mark else "0" for mark in marks])
        object.__setattr__(self, "traits", traits)

    @property
    def names(self) -> tuple[str, ...]:
        """Every name a table row may call it by, from exact to vague."""
        own = (self.key,) if self.tabulated else ()
        return (*own, f"class:{self.kind}", *(f"class:{family}" for family in FAMILIES[self.kind]))


def is_polar_kind(kind: str) -> bool:
    """True when groups of this class carry a strong bond dipole at the ring."""
    return kind in ("halogen", "linear carbon", "acyl", "ammonio") or not _POLAR_FAMILIES.isdisjoint(FAMILIES[kind])


def is_round_kind(kind: str) -> bool:
    """True when every group of this class is symmetrical about its bond."""
    return kind in _ROUND
