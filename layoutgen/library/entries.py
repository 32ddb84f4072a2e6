"""What the library holds: laminates, chip cases and shops, in SI units."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from layoutgen.errors import InputError
from layoutgen.library.keys import Checked, Key, Table
from layoutgen.library.layouts import CHIP_CASE, LAMINATE, SHOP

__all__ = ["ChipCase", "Copper", "Etching", "Laminate", "Shop", "Thickness"]


def _list_keys(table: Table, name: str) -> tuple[Key, ...]:
    return next(inner.keys for inner in table.tables if inner.name == name)


@dataclass(frozen=True, kw_only=True, slots=True)
class Thickness(Checked):
    """A stocked dielectric thickness.

    Attributes
    ----------
    nominal, tolerance : float
        Without copper, and the half-width of its band. [m]
    """

    nominal: float
    tolerance: float

    def __post_init__(self) -> None:
        self._require_keys(_list_keys(LAMINATE, "thickness"))
        self._require(self.tolerance < self.nominal, "tolerance", "must be smaller than the thickness")


@dataclass(frozen=True, kw_only=True, slots=True)
class Copper(Checked):
    """A stocked copper foil.

    Attributes
    ----------
    name : str
        Base thickness as the trade says it (``"18 um"``).
    base : float
        Thickness of the foil before plating. [m]
    roughness : float
        Root mean square, on the laminate's side. [m]
    conductivity : float
        Of the metal. [S/m]
    """

    name: str
    base: float
    roughness: float
    conductivity: float

    def __post_init__(self) -> None:
        self._require_keys(_list_keys(LAMINATE, "copper"))


@dataclass(frozen=True, kw_only=True, slots=True)
class Laminate(Checked):
    """A laminate class with what is stocked of it.

    Attributes
    ----------
    name, description : str
        Class and permittivity, never a brand; one line for the list.
    eps_r : float
        Design permittivity, the one the model uses. Roughness and dispersion up to
        `reference_frequency` are already in it. [1]
    eps_r_process, eps_r_tolerance : float
        Permittivity by the clamped stripline test, and the half-width of its band. [1]
    tan_delta : float
        Loss tangent. [1]
    reference_frequency : float
        At which permittivity and loss were taken. [Hz]
    eps_r_tempco : float
        Temperature coefficient of the permittivity. [1/K]
    expansion : float
        Thermal, in the plane of the board. [1/K]
    thicknesses : tuple of Thickness
        Stocked, rising.
    coppers : tuple of Copper
        Stocked, rising.
    source : str
        Where the figures come from.
    path : Path
        The file.
    """

    name: str
    description: str
    eps_r: float
    eps_r_process: float
    eps_r_tolerance: float
    tan_delta: float
    reference_frequency: float
    eps_r_tempco: float
    expansion: float
    thicknesses: tuple[Thickness, ...]
    coppers: tuple[Copper, ...]
    source: str
    path: Path

    def __post_init__(self) -> None:
        self._require_keys(LAMINATE.keys)


@dataclass(frozen=True, kw_only=True, slots=True)
class ChipCase(Checked):
    """A chip capacitor's case and the land pattern it is soldered to.

    Attributes
    ----------
    name, description : str
        Trade size in hundredths of an inch (``"0402"``); one line for the list.
    body_length, body_width, body_height : float
        Outline of the chip. [m]
    body_length_tolerance, body_width_tolerance : float
        Half-widths of their bands. [m]
    terminal_length, terminal_length_tolerance : float
        Of each metal end, and the half-width of its band. [m]
    land_length, land_width : float
        Each land, along and across the body. [m]
    land_gap : float
        Bare laminate between the lands. [m]
    current_height : float
        Mean height of the current above the lands. [m]
    voltage : float or None
        Rated, of common parts. [V]
    source : str
        Where the figures come from.
    path : Path
        The file.
    """

    name: str
    description: str
    body_length: float
    body_length_tolerance: float
    body_width: float
    body_width_tolerance: float
    body_height: float
    terminal_length: float
    terminal_length_tolerance: float
    land_length: float
    land_width: float
    land_gap: float
    current_height: float
    voltage: float | None
    source: str
    path: Path

    def __post_init__(self) -> None:
        self._require_keys(CHIP_CASE.keys)


@dataclass(frozen=True, kw_only=True, slots=True)
class Etching(Checked):
    """Etching limits up to one copper thickness.

    Attributes
    ----------
    copper : float
        Greatest finished thickness, foil and plating, that the limits hold for. [m]
    min_line, min_gap : float
        Narrowest line and gap. [m]
    """

    copper: float
    min_line: float
    min_gap: float

    def __post_init__(self) -> None:
        self._require_keys(_list_keys(SHOP, "etching"))


@dataclass(frozen=True, kw_only=True, slots=True)
class Shop(Checked):
    """What a board shop holds.

    Attributes
    ----------
    name, description : str
        Grade; one line for the list.
    etching : tuple of Etching
        Line and gap limits by finished copper thickness, rising.
    min_drill : float
        Finished diameter of the smallest plated hole. [m]
    aspect_ratio : float
        Greatest board thickness over tool diameter. [1]
    annular_ring : float
        Copper around a finished hole, so that a pad is ``drill + 2 * annular_ring``. [m]
    drill_to_conductor : float
        Edge of the tool to copper that the hole does not join. [m]
    conductor_to_edge : float
        Copper to the routed outline. [m]
    hole_tolerance_plus, hole_tolerance_minus : float
        A finished hole may be larger and smaller by these. [m]
    outline_tolerance : float
        Half-width of the band of the routed outline. [m]
    registration : float
        Greatest offset between drill and image. [m]
    mask_web : float
        Narrowest dam of solder mask. [m]
    mask_expansion : float
        Mask opening beyond the copper, each side. [m]
    grid : float
        Finest step of coordinates that is kept. [m]
    source : str
        Where the figures come from.
    path : Path
        The file.
    """

    name: str
    description: str
    etching: tuple[Etching, ...]
    min_drill: float
    aspect_ratio: float
    annular_ring: float
    drill_to_conductor: float
    conductor_to_edge: float
    hole_tolerance_plus: float
    hole_tolerance_minus: float
    outline_tolerance: float
    registration: float
    mask_web: float
    mask_expansion: float
    grid: float
    source: str
    path: Path

    def __post_init__(self) -> None:
        self._require_keys(SHOP.keys)

    def min_line(self, finished: float) -> float:
        """Narrowest line in copper of a finished thickness, [m] in and out; see `etching_for`."""
        return self.etching_for(finished).min_line

    def min_gap(self, finished: float) -> float:
        """Narrowest gap in copper of a finished thickness, [m] in and out; see `etching_for`."""
        return self.etching_for(finished).min_gap

    def etching_for(self, finished: float) -> Etching:
        """Limits for copper of a finished thickness: those of the next listed thickness.

        Parameters
        ----------
        finished : float
            Foil and plating together. [m]

        Returns
        -------
        Etching
            The row of the smallest listed thickness that is not below `finished`.

        Raises
        ------
        InputError
            If the copper is thicker than the shop lists.
        """
        for row in self.etching:
            if finished <= row.copper * (1 + 1e-9):
                return row
        limit = self.etching[-1].copper * 1e6
        raise InputError(
            f"shop {self.name}",
            "finished copper",
            f"{finished * 1e6:.4g} um",
            f"must be at most {limit:.4g} um, the thickest this shop lists",
        )
