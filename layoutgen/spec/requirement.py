"""What is asked of a filter, in SI units, with the memory of how the user wrote it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from layoutgen.errors import PhysicalRefusal
from layoutgen.library import SET, Change, Checked, ChipCase, Copper, Laminate, Library, Shop, Thickness
from layoutgen.spec import keys

__all__ = ["Board", "Construction", "Load", "Margin", "Part", "Passband", "Short", "Spec", "Stopband"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Part:
    """What the part is called.

    Attributes
    ----------
    number : str
        Part number, which is also the name of the files.
    title, revision : str
        For drawings and pages.
    """

    number: str
    title: str
    revision: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Passband(Checked):
    """The wanted band.

    Attributes
    ----------
    lower, upper : float
        Edges: ripple level (Chebyshev) or 3.01 dB (Butterworth). [Hz]
    shape : "chebyshev" or "butterworth"
        Of the response.
    return_loss : float or None
        Least in the band; None for Butterworth. [dB]
    order : int or None
        Number of resonators; None when it is to be chosen.
    insertion_loss : float or None
        Greatest allowed at the centre; None without a limit. [dB]
    impedance : float
        Of both ports. [ohm]
    """

    lower: float
    upper: float
    shape: Literal["chebyshev", "butterworth"]
    return_loss: float | None
    order: int | None
    insertion_loss: float | None
    impedance: float

    def __post_init__(self) -> None:
        self._require_keys(keys.PASSBAND.keys)
        self._require(self.upper > self.lower, "upper", "must be above the lower edge")

    @property
    def centre(self) -> float:
        """Geometric mean of the edges. [Hz]"""
        return math.sqrt(self.lower * self.upper)

    @property
    def bandwidth(self) -> float:
        """Difference of the edges. [Hz]"""
        return self.upper - self.lower

    @property
    def fractional_bandwidth(self) -> float:
        """Bandwidth over centre. [1]"""
        return self.bandwidth / self.centre


@dataclass(frozen=True, kw_only=True, slots=True)
class Stopband(Checked):
    """A band to be rejected.

    Attributes
    ----------
    lower, upper : float
        Ends. [Hz]
    rejection : float
        Least attenuation between them. [dB]
    """

    lower: float
    upper: float
    rejection: float

    def __post_init__(self) -> None:
        self._require_keys(keys.STOPBAND.keys)
        self._require(self.upper > self.lower, "upper", "must be above the lower end")


@dataclass(frozen=True, kw_only=True, slots=True)
class Margin(Checked):
    """How much better than required the comb is sized.

    Attributes
    ----------
    return_loss : float
        Deeper than required. [dB]
    bandwidth : float
        Wider than required, half of it at each edge. [Hz]
    """

    return_loss: float
    bandwidth: float

    def __post_init__(self) -> None:
        self._require_keys(keys.MARGIN.keys)


@dataclass(frozen=True, kw_only=True, slots=True)
class Construction(Checked):
    """What the filter is made of.

    Attributes
    ----------
    kind : "microstrip"
        Of line.
    laminate : Laminate
        With the values changed for this run.
    thickness : Thickness or None
        One of the laminate's; None when it is to be chosen.
    copper : Copper
        One of the laminate's.
    plating : float
        Added to the foil by the shop. [m]
    cover : float or None
        Height of a metal cover above the laminate; None when open. [m]
    line_width : float or None
        Of the resonators; None when it is to be chosen. [m]
    electrical_length : float or None
        Of the resonators at the centre of the band; None when it is to be chosen. [rad]
    """

    kind: Literal["microstrip"]
    laminate: Laminate
    thickness: Thickness | None
    copper: Copper
    plating: float
    cover: float | None
    line_width: float | None
    electrical_length: float | None

    def __post_init__(self) -> None:
        self._require_keys(keys.CONSTRUCTION.keys)

    @property
    def conductor(self) -> float:
        """Finished thickness of the copper, foil and plating. [m]"""
        return self.copper.base + self.plating


@dataclass(frozen=True, kw_only=True, slots=True)
class Load(Checked):
    """What loads the open ends. A printed plate leaves all but `kind` without meaning.

    Attributes
    ----------
    kind : "chip" or "plate"
        Chip capacitor to ground, or widened end.
    case : ChipCase or None
        None when it is to be chosen, and for a plate.
    series : tuple of float
        Stocked capacitances, rising; empty for a plate. [F]
    series_name : str
        ``"E12"``, ``"E24"``, ``"0.1 pF"`` or ``"list"``; empty for a plate.
    value : float or None
        Capacitance asked for, in the series or not; None when it is to be chosen. [F]
    tolerance : float
        Half-width of the value's band. [F]
    esr : float or None
        Series resistance; None where `q` says it. [ohm]
    q, q_frequency : float or None
        Quality factor, and the frequency it was taken at; None where `esr` says it. [1], [Hz]
    inductance : float
        Of the part beyond a plain conductor of its outline. [H]
    """

    kind: Literal["chip", "plate"]
    case: ChipCase | None
    series: tuple[float, ...]
    series_name: str
    value: float | None
    tolerance: float
    esr: float | None
    q: float | None
    q_frequency: float | None
    inductance: float

    def __post_init__(self) -> None:
        self._require_keys(keys.LOAD.keys)
        if self.kind == "chip":
            self._require((self.esr is None) != (self.q is None), "esr", "or q must be given, and not both")
            self._require((self.q is None) == (self.q_frequency is None), "q_frequency", "belongs to q")

    def resistance(self, capacitance: float) -> float:
        """Series resistance of a chip, constant with frequency; 0 for a plate.

        Parameters
        ----------
        capacitance : float
            Of the chip. [F]

        Returns
        -------
        float
            As given, or from the quality factor at its own frequency. [ohm]
        """
        if self.esr is not None:
            return self.esr
        if self.q is None or self.q_frequency is None:
            return 0.0
        return 1 / (2 * math.pi * self.q_frequency * capacitance * self.q)


@dataclass(frozen=True, kw_only=True, slots=True)
class Short(Checked):
    """Plated holes at the grounded ends.

    Attributes
    ----------
    drill : float
        Finished diameter. [m]
    plating : float
        Tool diameter less finished diameter. [m]
    count : int or None
        Holes of each resonator; None when it is to be chosen.
    pitch : float
        Between their centres. [m]
    """

    drill: float
    plating: float
    count: int | None
    pitch: float

    def __post_init__(self) -> None:
        self._require_keys(keys.SHORT.keys)

    @property
    def tool(self) -> float:
        """Diameter of the tool, which is the outside of the plated barrel. [m]"""
        return self.drill + self.plating


@dataclass(frozen=True, kw_only=True, slots=True)
class Board(Checked):
    """The board and who makes it.

    Attributes
    ----------
    shop : Shop
        With the values changed for this run.
    grid : float
        Step of all coordinates. [m]
    margin : float
        Ground border between the clear area and the board edge. [m]
    clearance : float or None
        From resonators to top ground; None for 8 laminate thicknesses. [m]
    max_width, max_height : float or None
        Greatest size of the board; None without a limit. [m]
    connector : "edge pads" or "none"
        Copper at the board edge.
    """

    shop: Shop
    grid: float
    margin: float
    clearance: float | None
    max_width: float | None
    max_height: float | None
    connector: Literal["edge pads", "none"]

    def __post_init__(self) -> None:
        self._require_keys(keys.BOARD.keys)


@dataclass(frozen=True, kw_only=True, slots=True)
class Spec:
    """A whole specification.

    Attributes
    ----------
    path : Path
        The file.
    part, passband, stopbands, margin, construction, load, short, board
        Its tables.
    overrides : tuple of str
        ``"KEY=VALUE"`` as given for this run.
    library : Library
        Where names were, and are to be, looked up.
    defaults : tuple of str
        ``"key = value"`` of each key that the file leaves out.
    written : mapping of str to str
        Dotted keys and their values as the user wrote them.
    changes : mapping of str to Change
        Dotted keys that were overridden.
    """

    path: Path
    part: Part
    passband: Passband
    stopbands: tuple[Stopband, ...]
    margin: Margin
    construction: Construction
    load: Load
    short: Short
    board: Board
    overrides: tuple[str, ...]
    library: Library
    defaults: tuple[str, ...]
    written: Mapping[str, str] = field(repr=False)
    changes: Mapping[str, Change] = field(repr=False)

    def text(self, key: str) -> str | None:
        """Value of a dotted key (``stopband.1.from``) as the user wrote it; None when absent."""
        return self.written.get(key)

    def refusal(self, key: str, remedy: str, got: object = None) -> PhysicalRefusal:
        """Refusal of a valid request, ready to be raised.

        Parameters
        ----------
        key : str
            Dotted key that asks for what cannot be done.
        remedy : str
            The figure, and what would work.
        got : object, optional
            In place of the value as the user wrote it.

        Returns
        -------
        PhysicalRefusal
            It names the file, or ``--set`` where the key was overridden.
        """
        where = SET if key in self.changes else str(self.path)
        return PhysicalRefusal(where, key, self.text(key) if got is None else got, remedy)
