"""Names of land patterns from dimensions, by the convention of IPC-7351 and, for through-hole parts, IPC-7251.

A layout library that follows the convention has a pattern of that name; others are mapped by a file.
IPC-7251 was circulated as a draft and never published: the names for through-hole parts are in its style.
"""

from __future__ import annotations

from decimal import ROUND_HALF_DOWN, ROUND_HALF_UP, Decimal


def chip(family: str, length: float, width: float, height: float, density: str = "N") -> str:
    """Chip, moulded and flat two-terminal parts: RESC, CAPC, DIOM, SOD, SODFL.

    Parameters
    ----------
    family : str
        Leading letters: ``RESC``, ``CAPC``, ``CAPM``, ``DIOM``, ``SOD``, ``SODFL``. [-]
    length : float
        Length over the terminals. [m]
    width : float
        Body width. [m]
    height : float
        Greatest height. [m]
    density : str
        ``M`` most, ``N`` nominal, ``L`` least copper. [-]

    Returns
    -------
    str
        Length and width in tenths of a millimetre, height in hundredths: ``RESC1608X55N``. [-]

    Raises
    ------
    ValueError
        When a dimension is not above zero, or the density is unknown.

    Notes
    -----
    A half is rounded down, since 2.0 mm by 1.25 mm is the size 2012.

    References
    ----------
    .. [1] IPC-7351B, Generic Requirements for Surface Mount Design and Land Pattern Standard, naming convention.

    Examples
    --------
    >>> chip("RESC", 1.6e-3, 0.8e-3, 0.55e-3)
    'RESC1608X55N'
    """
    short = "".join(_figure(name, x, 1e-4).zfill(2) for name, x in (("length", length), ("width", width)))
    return f"{family}{short}X{_figure('height', height)}{_density(density)}"


def small_outline(family: str, pitch: float, span: float, height: float, pins: int, density: str = "N") -> str:
    """Gull-wing packages: SOIC, SOP, SOT.

    Parameters
    ----------
    family : str
        Leading letters: ``SOIC``, ``SOP``, ``SOT``. [-]
    pitch : float
        Distance of neighbouring pins. [m]
    span : float
        Greatest nominal extent over the leads. [m]
    height : float
        Greatest height. [m]
    pins : int
        Number of pins. [-]
    density : str
        ``M`` most, ``N`` nominal, ``L`` least copper. [-]

    Returns
    -------
    str
        In hundredths of a millimetre: ``SOIC127P600X175-8N``. [-]

    Raises
    ------
    ValueError
        When a dimension or the number of pins is not above zero, or the density is unknown.

    References
    ----------
    .. [1] IPC-7351B, Generic Requirements for Surface Mount Design and Land Pattern Standard, naming convention.

    Examples
    --------
    >>> small_outline("SOIC", 1.27e-3, 6.0e-3, 1.75e-3, 8)
    'SOIC127P600X175-8N'
    """
    name = f"{family}{_figure('pitch', pitch)}P{_figure('span', span)}X{_figure('height', height)}"
    return f"{name}-{_count(pins)}{_density(density)}"


def aluminium(base: float, height: float, density: str = "N") -> str:
    """Aluminium electrolytic on a square base for surface mounting.

    Parameters
    ----------
    base : float
        Side of the base. [m]
    height : float
        Greatest height. [m]
    density : str
        ``M`` most, ``N`` nominal, ``L`` least copper. [-]

    Returns
    -------
    str
        In hundredths of a millimetre: ``CAPAE660X550N``. [-]

    Raises
    ------
    ValueError
        When a dimension is not above zero, or the density is unknown.

    References
    ----------
    .. [1] IPC-7351B, Generic Requirements for Surface Mount Design and Land Pattern Standard, naming convention.

    Examples
    --------
    >>> aluminium(6.6e-3, 5.5e-3)
    'CAPAE660X550N'
    """
    return f"CAPAE{_figure('base', base)}X{_figure('height', height)}{_density(density)}"


def axial(family: str, pitch: float, lead: float, length: float, diameter: float) -> str:
    """Parts with axial leads, lying: RESAD, DIOAD, CAPAD.

    Parameters
    ----------
    family : str
        Leading letters: ``RESAD``, ``DIOAD``, ``CAPAD``. [-]
    pitch : float
        Lead spacing, after bending. [m]
    lead : float
        Lead diameter. [m]
    length : float
        Body length. [m]
    diameter : float
        Body diameter. [m]

    Returns
    -------
    str
        In hundredths of a millimetre: ``RESAD1016W60L630D250``. [-]

    Raises
    ------
    ValueError
        When a dimension is not above zero.

    References
    ----------
    .. [1] Draft IPC-7251, naming convention for through-hole land patterns.

    Examples
    --------
    >>> axial("DIOAD", 6.8e-3, 0.5e-3, 4.05e-3, 1.65e-3)
    'DIOAD680W50L405D165'
    """
    return (
        f"{family}{_figure('pitch', pitch)}W{_figure('lead', lead)}"
        f"L{_figure('length', length)}D{_figure('diameter', diameter)}"
    )


def radial_round(pitch: float, lead: float, diameter: float, height: float, polarised: bool = True) -> str:
    """Round capacitors with radial leads.

    Parameters
    ----------
    pitch : float
        Lead spacing. [m]
    lead : float
        Lead diameter. [m]
    diameter : float
        Can diameter. [m]
    height : float
        Greatest height. [m]
    polarised : bool
        Whether the part is polarised. [-]

    Returns
    -------
    str
        In hundredths of a millimetre: ``CAPPRD250W50D630H1150``, ``CAPRD...`` when not polarised. [-]

    Raises
    ------
    ValueError
        When a dimension is not above zero.

    References
    ----------
    .. [1] Draft IPC-7251, naming convention for through-hole land patterns.

    Examples
    --------
    >>> radial_round(2.5e-3, 0.5e-3, 6.3e-3, 11.5e-3)
    'CAPPRD250W50D630H1150'
    """
    return (
        f"{'CAPPRD' if polarised else 'CAPRD'}{_figure('pitch', pitch)}W{_figure('lead', lead)}"
        f"D{_figure('diameter', diameter)}H{_figure('height', height)}"
    )


def radial_box(pitch: float, lead: float, length: float, thickness: float, height: float) -> str:
    """Rectangular capacitors with radial leads, not polarised.

    Parameters
    ----------
    pitch : float
        Lead spacing. [m]
    lead : float
        Lead diameter. [m]
    length : float
        Body length, along the leads' spacing. [m]
    thickness : float
        Body thickness. [m]
    height : float
        Greatest height. [m]

    Returns
    -------
    str
        In hundredths of a millimetre: ``CAPRR500W50L720T350H850``. [-]

    Raises
    ------
    ValueError
        When a dimension is not above zero.

    References
    ----------
    .. [1] Draft IPC-7251, naming convention for through-hole land patterns.

    Examples
    --------
    >>> radial_box(5e-3, 0.5e-3, 7.2e-3, 3.5e-3, 8.5e-3)
    'CAPRR500W50L720T350H850'
    """
    return (
        f"CAPRR{_figure('pitch', pitch)}W{_figure('lead', lead)}L{_figure('length', length)}"
        f"T{_figure('thickness', thickness)}H{_figure('height', height)}"
    )


def dual_in_line(span: float, lead: float, pitch: float, length: float, height: float, pins: int) -> str:
    """Dual-in-line packages.

    Parameters
    ----------
    span : float
        Distance of the two rows. [m]
    lead : float
        Greatest lead width. [m]
    pitch : float
        Distance of neighbouring pins. [m]
    length : float
        Body length. [m]
    height : float
        Greatest height. [m]
    pins : int
        Number of pins. [-]

    Returns
    -------
    str
        In hundredths of a millimetre: ``DIP762W53P254L959H508Q8``. [-]

    Raises
    ------
    ValueError
        When a dimension or the number of pins is not above zero.

    References
    ----------
    .. [1] Draft IPC-7251, naming convention for through-hole land patterns.

    Examples
    --------
    >>> dual_in_line(7.62e-3, 0.53e-3, 2.54e-3, 9.59e-3, 5.08e-3, 8)
    'DIP762W53P254L959H508Q8'
    """
    return (
        f"DIP{_figure('span', span)}W{_figure('lead', lead)}P{_figure('pitch', pitch)}"
        f"L{_figure('length', length)}H{_figure('height', height)}Q{_count(pins)}"
    )


def _figure(name: str, dimension: float, unit: float = 1e-5) -> str:
    """A dimension as a whole number of units, by default hundredths of a millimetre."""
    # nine decimals first: 1.25e-3/1e-4 must be a half, whatever binary fractions make of it
    count = Decimal(f"{dimension / unit:.9f}") if 0.0 < dimension < 1.0 else Decimal(0)
    whole = count.quantize(Decimal(1), ROUND_HALF_DOWN if unit == 1e-4 else ROUND_HALF_UP)
    if whole <= 0:
        raise ValueError(f"{name} {dimension:g} m: above 0 m and below 1 m")
    return str(whole)


def _count(pins: int) -> str:
    """The number of pins as text."""
    if pins < 1:
        raise ValueError(f"{pins} pins: at least 1")
    return str(pins)


def _density(density: str) -> str:
    """The density letter, if it is one."""
    if density not in ("M", "N", "L"):
        raise ValueError(f"unknown density {density!r}: it is M, N or L")
    return density
