"""Records of the tables: claims, preferences, groups, classes, solvents."""

from __future__ import annotations

from dataclasses import dataclass, field

from ringstrain.provenance import KnownBy, Source


@dataclass(frozen=True, slots=True, kw_only=True)
class Claim:
    """One published number, exactly as printed.

    Attributes
    ----------
    table
        Table it stands in, e.g. ``"avalues"``.
    id
        Name of the row, unique in its table.
    line
        Line of the file, header being 1.
    groups
        Groups it is about: one for an A-value, two for a pair.
    form
        What the number is (see columns.csv).
    value
        The number [in ``unit``]; None when only a direction is known.
    unit, quantity
        As printed.
    uncertainty
        As printed [in ``unit``]; None when not given.
    bound
        ``"at least"`` or empty.
    dh_kcal, ds_cal
        Enthalpy [kcal/mol] and entropy [cal/(mol K)] of axial to equatorial, when both are known.
    own_a
        A-values [kcal/mol] of the two groups at the level of a computed pair row.
    temperature_K
        Temperature [K]; None when not stated.
    medium, solvent
        Medium class, and the solvent as stated.
    ring, position
        Parent ring and position of a ring-specific value, else empty.
    method, source, locator, known_by, note
        How it was obtained and where it stands.
    """

    table: str
    id: str
    line: int
    groups: tuple[str, ...]
    form: str
    value: float | None
    unit: str
    quantity: str
    uncertainty: float | None
    bound: str
    dh_kcal: float | None
    ds_cal: float | None
    own_a: tuple[float, float] | None
    temperature_K: float | None
    medium: str
    solvent: str
    ring: str
    position: str
    method: str
    source: str
    locator: str
    known_by: KnownBy
    note: str

    @property
    def row(self) -> str:
        """Name of the row across all tables."""
        return f"{self.table}/{self.id}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Preference:
    """Which of several rival claims is used for a key in a medium, and why."""

    table: str
    key: str
    medium: str
    row: str
    uncertainty: float | None
    why: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupEntry:
    """A tabulated group: key, SMILES with its attachment star, aliases."""

    key: str
    smiles: str
    aliases: tuple[str, ...]
    note: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassEstimate:
    """Mean A-value of a class of groups, for groups no row names.

    Attributes
    ----------
    key
        Class name.
    value, uncertainty
        Mean and standard uncertainty [kcal/mol].
    bound
        ``"at least"`` or empty.
    evidence
        Which groups it rests on, in words.
    """

    key: str
    value: float
    uncertainty: float
    bound: str
    evidence: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupSize:
    """How a class of groups compares with methyl as a neighbour, for the combining rule.

    Attributes
    ----------
    key
        Class or group key.
    vicinal, vicinal_uncertainty
        Vicinal gauche term with methyl [kcal/mol].
    syn_axial, syn_axial_uncertainty
        Whole syn-axial contact with methyl [kcal/mol].
    evidence
        Rows it rests on, in words.
    """

    key: str
    vicinal: float
    vicinal_uncertainty: float
    syn_axial: float
    syn_axial_uncertainty: float
    evidence: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Solvent:
    """A named solvent: medium class and whether it accepts hydrogen bonds."""

    name: str
    aliases: tuple[str, ...]
    medium: str
    accepts_hydrogen_bonds: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tables:
    """Everything tables/ holds, read once and never changed.

    Attributes
    ----------
    revision
        Hash of the files, to tell one set of tables from another.
    sources
        Publications by key.
    claims
        Every published number.
    preferences
        Which rival is used.
    groups, classes, sizes, solvents
        Groups, class estimates, combining sizes, solvents.
    model_terms
        Standard uncertainty of the additive model itself by regime [kcal/mol].
    """

    revision: str
    sources: dict[str, Source]
    claims: tuple[Claim, ...]
    preferences: tuple[Preference, ...]
    groups: tuple[GroupEntry, ...]
    classes: dict[str, ClassEstimate]
    sizes: dict[str, GroupSize]
    solvents: tuple[Solvent, ...]
    model_terms: dict[str, float]
    _names: dict[str, GroupEntry] = field(default_factory=dict, repr=False)
    _rows: dict[str, Claim] = field(default_factory=dict, repr=False)
    _by_key: dict[tuple[str, str], tuple[Claim, ...]] = field(default_factory=dict, repr=False)
    _preferred: dict[tuple[str, str, str], Preference] = field(default_factory=dict, repr=False)
    _kin: dict[str, tuple[Claim, ...]] = field(default_factory=dict, repr=False)

    def __post_init__(self) -> None:
        for group in self.groups:
            for name in (group.key, *group.aliases):
                self._names.setdefault(name, group)
        for claim in self.claims:
            self._rows[claim.row] = claim
        grouped: dict[tuple[str, str], list[Claim]] = {}
        for claim in self.claims:
            grouped.setdefault((claim.table, claim_key(claim)), []).append(claim)
        self._by_key.update({key: tuple(rows) for key, rows in grouped.items()})
        for claim in self.claims:
            if claim.table == "kin":
                self._kin[claim.groups[0]] = (*self._kin.get(claim.groups[0], ()), claim)
        for preference in self.preferences:
            self._preferred[(preference.table, preference.key, preference.medium)] = preference

    def find_group(self, name: str) -> GroupEntry | None:
        """The group with this key or alias (letter case forgiven when that is unambiguous), or None."""
        exact = self._names.get(name)
        if exact is not None:
            return exact
        loose = {entry.key: entry for other, entry in self._names.items() if other.lower() == name.lower()}
        return next(iter(loose.values())) if len(loose) == 1 else None

    def group_names(self) -> tuple[str, ...]:
        """Every key and alias."""
        return tuple(self._names)

    def row(self, name: str) -> Claim:
        """A claim by its row name.

        Raises
        ------
        KeyError
            If there is none.
        """
        return self._rows[name]

    def has_row(self, name: str) -> bool:
        """True when a claim of that row name exists."""
        return name in self._rows

    def rivals(self, table: str, key: str) -> tuple[Claim, ...]:
        """All claims about one key of one table, in file order."""
        return self._by_key.get((table, key), ())

    def kin(self, who: str) -> tuple[Claim, ...]:
        """Stand-ins for a group key or ``class:`` name, nearest first."""
        return self._kin.get(who, ())

    def preference(self, table: str, key: str, medium: str) -> Preference | None:
        """The preference for a key in a medium, or None."""
        return self._preferred.get((table, key, medium))

    def find_solvent(self, name: str) -> Solvent | None:
        """A solvent by name or alias, letter case forgiven, or None."""
        wanted = name.lower()
        for solvent in self.solvents:
            if wanted == solvent.name.lower() or wanted in (alias.lower() for alias in solvent.aliases):
                return solvent
        return None


def pair_key(first: str, second: str) -> str:
    """Key of a pair, whatever the order of its groups."""
    return "/".join(sorted((first, second)))


def claim_key(claim: Claim) -> str:
    """Key of a claim within its table: the group, the pair, or ring, position and group."""
    if claim.ring:
        return "/".join((claim.ring, claim.position, *claim.groups))
    return "/".join(sorted(claim.groups))
