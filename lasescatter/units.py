"""Values with units, as text, to SI floats and back. Nothing else knows the unit library.

The grammar is our own and small: a decimal number, then one unit expression made of allow-listed unit
names with ``/``, ``*`` or a space between factors, ``^`` before a whole exponent, one pair of
brackets, and optionally a leading ``/``. Nothing is evaluated. The unit library only supplies the
conversion factor of an expression that has already been taken apart here.

    value   = number, unit
    unit    = ["/"], factor, { ("/" | "*" | " "), factor }
    factor  = name, [ "^", exponent ] | "(", unit, ")"

A product after a division ("W/m^2 sr") can be read in two ways and is refused: W/(m^2 sr).
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from functools import lru_cache
from typing import Any

_NAMES: Mapping[str, str] = {
    "length": "nm=nanometer um=micrometer mm=millimeter cm=centimeter m=meter km=kilometer in=inch ft=foot",
    "power": "nW=nanowatt uW=microwatt mW=milliwatt W=watt kW=kilowatt MW=megawatt",
    "energy": "pJ=picojoule nJ=nanojoule uJ=microjoule mJ=millijoule J=joule kJ=kilojoule",
    "time": "fs=femtosecond ps=picosecond ns=nanosecond us=microsecond ms=millisecond s=second min=minute h=hour",
    "frequency": "Hz=hertz kHz=kilohertz MHz=megahertz GHz=gigahertz",
    "angle": "urad=microradian mrad=milliradian rad=radian deg=degree",
    "solid angle": "sr=steradian",
    "mass": "ng=nanogram ug=microgram mg=milligram g=gram kg=kilogram",
    "volume": "mL=milliliter L=liter",
    "pressure": "Pa=pascal hPa=hectopascal kPa=kilopascal mbar=millibar bar=bar",
    "temperature": "K=kelvin degC=degree_Celsius degF=degree_Fahrenheit",
    "fraction": "%=percent",
    "decibel": "dB=dimensionless",
}

UNITS: Mapping[str, tuple[str, str]] = {
    name: (sort, long) for sort, pairs in _NAMES.items() for name, long in (pair.split("=") for pair in pairs.split())
}
"""Unit name as typed: what it measures, and its name in the unit library."""

# Names that people write, to the ones that are read. Only ever used to say what would be right.
_OTHER_NAMES: Mapping[str, str] = {
    "watt": "W", "watts": "W", "milliwatt": "mW", "milliwatts": "mW", "kilowatt": "kW", "joule": "J", "joules": "J",
    "sec": "s", "secs": "s", "second": "s", "seconds": "s", "minute": "min", "minutes": "min", "hour": "h",
    "hours": "h", "hr": "h", "hrs": "h", "meter": "m", "meters": "m", "metre": "m", "metres": "m", "micron": "um",
    "microns": "um", "nanometer": "nm", "nanometers": "nm", "nanometre": "nm", "nanometres": "nm", "foot": "ft",
    "feet": "ft", "inch": "in", "inches": "in", "degree": "deg", "degrees": "deg", "radian": "rad", "radians": "rad",
    "ster": "sr", "steradian": "sr", "hertz": "Hz", "c": "degC", "f": "degF", "celsius": "degC", "fahrenheit": "degF",
    "kelvin": "K", "percent": "%", "pct": "%", "gram": "g", "grams": "g", "cc": "cm^3", "liter": "L", "litre": "L",
    "gr": "g", "atm": "hPa", "torr": "hPa", "mmHg": "hPa", "mb": "mbar",
    "db": "dB", "decibel": "dB", "decibels": "dB",
}  # fmt: skip

_LENGTHS = ("m", "cm", "mm", "um", "nm", "km", "ft", "in")
_POWERS = ("W", "mW", "uW", "nW", "kW", "MW")
_ENERGIES = ("J", "mJ", "uJ", "nJ", "pJ", "kJ")
_TIMES = ("s", "ms", "us", "ns", "ps", "fs", "min", "h")
_FREQUENCIES = ("Hz", "kHz", "MHz", "GHz")
_MASSES = ("kg", "g", "mg", "ug", "ng")
_AREAS = ("m", "cm", "mm")


@dataclass(frozen=True)
class Kind:
    """One kind of quantity: what may be written for it and what it is in SI."""

    phrase: str
    """With its article, for messages: "a power"."""
    si: str
    """Its SI unit as printed."""
    target: str
    """Its SI unit in the unit library's words."""
    allowed: tuple[str, ...]
    """Unit names that may occur in its expressions."""
    forms: tuple[Mapping[str, int], ...]
    """Exponent of each sort of unit; one of these must be met exactly."""
    fitting: tuple[str, ...]
    """Expressions named to the user when the unit does not fit."""


def _simple(phrase: str, si: str, target: str, names: tuple[str, ...]) -> Kind:
    return Kind(phrase, si, target, names, ({UNITS[names[0]][0]: 1},), names)


KINDS: Mapping[str, Kind] = {
    "length": _simple("a length", "m", "meter", _LENGTHS),
    "wavelength": _simple("a wavelength", "m", "meter", ("nm", "um", "mm", "m")),
    "power": _simple("a power", "W", "watt", _POWERS),
    "energy": _simple("an energy", "J", "joule", _ENERGIES),
    "time": _simple("a time", "s", "second", _TIMES),
    "angle": _simple("an angle", "rad", "radian", ("mrad", "urad", "rad", "deg")),
    "rate": Kind(
        "a repetition rate", "Hz", "1/second", (*_FREQUENCIES, "s", "min"), ({"frequency": 1}, {"time": -1}),
        (*_FREQUENCIES, "/s"),
    ),
    "irradiance": Kind(
        "an irradiance", "W/m²", "watt/meter**2", (*_POWERS, *_AREAS), ({"power": 1, "length": -2},),
        ("W/m^2", "mW/cm^2", "uW/cm^2", "W/cm^2"),
    ),
    "radiant exposure": Kind(
        "a radiant exposure", "J/m²", "joule/meter**2", (*_ENERGIES, *_AREAS), ({"energy": 1, "length": -2},),
        ("J/m^2", "mJ/cm^2", "uJ/cm^2", "J/cm^2"),
    ),
    "radiance": Kind(
        "a radiance", "W/(m²·sr)", "watt/meter**2/steradian", (*_POWERS, *_AREAS, "sr"),
        ({"power": 1, "length": -2, "solid angle": -1},), ("W/(m^2 sr)", "mW/(cm^2 sr)", "W/(cm^2 sr)"),
    ),
    "radiance dose": Kind(
        "a radiance dose", "J/(m²·sr)", "joule/meter**2/steradian", (*_ENERGIES, *_AREAS, "sr"),
        ({"energy": 1, "length": -2, "solid angle": -1},), ("J/(m^2 sr)", "mJ/(cm^2 sr)", "J/(cm^2 sr)"),
    ),
    "extinction": Kind(
        "an extinction coefficient", "/m", "1/meter", ("m", "cm", "mm", "km", "ft"), ({"length": -1},),
        ("/m", "/km", "/cm", "/ft"),
    ),
    "optical density": Kind(
        "an optical density per length", "/m", "1/meter", ("m", "cm", "mm", "km", "ft"), ({"length": -1},),
        ("/m", "/ft", "/km"),
    ),
    "attenuation": Kind(
        "an attenuation in decibels per length", "dB/m", "1/meter", ("dB", "m", "cm", "mm", "km", "ft"),
        ({"decibel": 1, "length": -1},), ("dB/m", "dB/km", "dB/ft"),
    ),
    # Shares lost do not add up along a path: only `parse_obscuration` gives what can be computed with.
    "obscuration": Kind(
        "an obscuration in per cent per length", "%/m", "percent/meter", ("%", *_LENGTHS),
        ({"fraction": 1, "length": -1},), ("%/m", "%/ft"),
    ),
    "mass concentration": Kind(
        "a mass concentration", "kg/m³", "kilogram/meter**3", (*_MASSES, "m", "cm", "L"),
        ({"mass": 1, "length": -3}, {"mass": 1, "volume": -1}), ("mg/m^3", "g/m^3", "ug/m^3", "kg/m^3", "mg/L"),
    ),
    "number concentration": Kind(
        "a number concentration", "/m³", "1/meter**3", ("m", "cm", "mm", "L"), ({"length": -3}, {"volume": -1}),
        ("/cm^3", "/m^3", "/L"),
    ),
    "density": Kind(
        "a density", "kg/m³", "kilogram/meter**3", ("kg", "g", "m", "cm", "mL", "L"),
        ({"mass": 1, "length": -3}, {"mass": 1, "volume": -1}), ("g/cm^3", "kg/m^3", "kg/L", "g/mL"),
    ),
    "temperature": _simple("a temperature", "K", "kelvin", ("degC", "K", "degF")),
    "pressure": _simple("a pressure", "Pa", "pascal", ("hPa", "Pa", "kPa", "mbar", "bar")),
    "fraction": _simple("a percentage", "", "dimensionless", ("%",)),
}  # fmt: skip

_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?(?![0-9.])")
_TOKEN = re.compile(r"\s*(?:[A-Za-z%]+|\^\s*[+-]?[0-9]+|[/*()])")
_UNRAISED = re.compile(r"(?<![A-Za-z])(?P<name>[A-Za-z]+)\s?(?P<power>-?[1-4])(?![0-9.])")
_LONGEST_NUMBER = 40
_LARGEST_EXPONENT = 40
_LONGEST_TEXT = 200
_LOOK_ALIKES = str.maketrans({"µ": "u", "μ": "u", "·": "*", "⋅": "*"})
_RAISED = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")


class QuantityError(ValueError):
    """A text is not a value of the kind that is due.

    `wrong` is said of the text ("is an energy, and a power is due"); `mend` says what would be right.
    """

    def __init__(self, text: str, wrong: str, mend: str) -> None:
        self.text, self.wrong, self.mend = text, wrong, mend
        super().__init__(f"{text!r} {wrong}. {mend}.")


def fitting_units(kind: str) -> str:
    """The units that fit a kind, as words: "W, mW or kW"."""
    *most, last = KINDS[kind].fitting
    return f"{', '.join(most)} or {last}" if most else last


def parse_quantity(text: str, kind: str) -> float:
    """A value with its unit to SI.

    Parameters
    ----------
    text : str
        For example "5 W", "532nm", "2.55 mW/cm^2", "0.05 /m", "10 W/(m^2 sr)".
    kind : str
        A key of `KINDS`.

    Returns
    -------
    float
        In the kind's SI unit; the decimal digits are converted exactly and rounded once.

    Raises
    ------
    QuantityError
        For anything else: no unit or one that does not fit, nan, inf, an absurd exponent, junk.
    """
    number, exponents = _taken_apart(text, kind)
    if set(_sorts(exponents)) == {"temperature"}:
        return float(_kelvin(number, next(iter(exponents))))
    return float(number * _factor(tuple(sorted(exponents.items())), KINDS[kind].target))


def parse_obscuration(text: str) -> tuple[float, float]:
    """Light lost over a length: "5 %/ft" is (0.05, 0.3048).

    Returns
    -------
    share, length : float
        The share of the light lost over one of the unit's lengths, and that length [m].

    Raises
    ------
    QuantityError
        As `parse_quantity`.
    """
    number, exponents = _taken_apart(text, "obscuration")
    ((name, _),) = ((name, exponent) for name, exponent in exponents.items() if UNITS[name][0] == "length")
    return float(number * _factor((("%", 1),), "dimensionless")), float(_factor(((name, 1),), "meter"))


def unit_factor(unit: str, kind: str) -> Decimal:
    """SI value of one of a unit, as in the header of a table: "um" of a length is 1e-6.

    Raises
    ------
    QuantityError
        For a unit that does not fit the kind. Temperatures have no factor.
    """
    if len(unit) > _LONGEST_TEXT:
        raise QuantityError(unit[:_LONGEST_TEXT], "is far too long for a unit", _say_due(kind))
    exponents = _fitting_exponents(unit, unit, kind)
    return _factor(tuple(sorted(exponents.items())), KINDS[kind].target)


def _taken_apart(text: str, kind: str) -> tuple[Decimal, dict[str, int]]:
    """The number in front, and the exponent of each unit name behind it."""
    if len(text) > _LONGEST_TEXT:
        raise QuantityError(text[:_LONGEST_TEXT], "is far too long for a value", _say_due(kind))
    number, rest = _split_number(text, text.strip(), kind)
    if not rest.strip():
        raise QuantityError(text, "has no unit", _say_due(kind))
    return number, _fitting_exponents(text, rest, kind)


def _fitting_exponents(text: str, expression: str, kind: str) -> dict[str, int]:
    """Exponent of each unit name of an expression that fits the kind."""
    due = KINDS[kind]
    exponents = _read_unit(text, expression, kind)
    sorts = _sorts(exponents)
    if len(sorts) < len(exponents):
        raise QuantityError(text, "has two units of the same sort", _say_due(kind))
    if sorts not in due.forms:
        raise QuantityError(text, _name_misfit(sorts, due), _say_due(kind))
    foreign = [name for name in exponents if name not in due.allowed]
    if foreign:
        raise QuantityError(text, f"has a unit ({foreign[0]}) that is not read for {due.phrase}", _say_due(kind))
    return exponents


def si_text(value: float, kind: str) -> str:
    """A value in SI as printed beside the user's own text: "5.32e-07 m"."""
    return f"{value:.9g} {KINDS[kind].si}".rstrip()


def _say_due(kind: str) -> str:
    return f"Give {KINDS[kind].phrase} as a number and a unit that fits: {fitting_units(kind)}"


def _split_number(text: str, plain: str, kind: str) -> tuple[Decimal, str]:
    """The number in front, and what follows it."""
    if not plain:
        raise QuantityError(text, "is empty", _say_due(kind))
    if "±" in plain or "+/-" in plain or "+-" in plain:
        raise QuantityError(text, "states an uncertainty (±), which is not built yet",
                            "Give one value, on the side that makes the exposure larger")  # fmt: skip
    if plain[0] in "−–—":
        raise QuantityError(text, "begins with a dash that is not a minus sign", 'Type a plain "-", or no sign')
    if re.match(r"[+-]?(nan|inf)", plain, re.IGNORECASE):
        raise QuantityError(text, "is not a finite number", _say_due(kind))
    match = _NUMBER.match(plain)
    if match is None:
        raise QuantityError(text, "does not begin with a decimal number", _say_due(kind))
    digits, rest = match.group(), plain[match.end() :]
    if re.match(r"[,'’_][0-9]", rest):
        raise QuantityError(
            text,
            f"has {rest[0]!r} inside the number",
            "Use a point for decimals and nothing between thousands, for example 2.5 or 12000",
        )
    reciprocal = re.match(r"\s+1\s*(/.*)", rest)
    if reciprocal:
        raise QuantityError(text, "has two numbers", f"Leave out the 1 before the unit: write {digits} {reciprocal[1]}")
    if re.match(r"\s*[x×]\s*10|\s+[0-9.+-]", rest):
        raise QuantityError(text, "has two numbers", 'Write one number, with "e" for powers of ten: 5e-3')
    exponent = re.search(r"[eE]([+-]?[0-9]+)$", digits)
    if len(digits) > _LONGEST_NUMBER or (exponent and abs(int(exponent[1])) > _LARGEST_EXPONENT):
        raise QuantityError(
            text,
            "is not a believable number",
            f"Use at most {_LONGEST_NUMBER} digits and a power of ten within ±{_LARGEST_EXPONENT}",
        )
    return Decimal(digits), rest


def _plain_ascii(rest: str) -> str:
    """Signs that are typed or copied from print (µ, ², ·, °C), as the plain characters of the grammar."""
    plain = re.sub(r"°\s*([CF])\b", r"deg\1", rest).replace("°", "deg")
    plain = re.sub(r"[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+", lambda raised: "^" + raised[0].translate(_RAISED), plain)
    return plain.translate(_LOOK_ALIKES)


def _read_unit(text: str, rest: str, kind: str) -> dict[str, int]:
    """Exponent of every unit name of an expression, in the order of writing."""
    plain, tokens, position = _plain_ascii(rest).strip(), list[str](), 0
    junk = _unraised(text, plain, kind) or QuantityError(
        text, f"has a unit that cannot be read ({rest.strip()!r})", _say_due(kind)
    )
    while position < len(plain):
        token = _TOKEN.match(plain, position)
        if token is None:
            raise junk
        tokens.append(token.group().strip())
        position = token.end()
    try:
        factors, end = _product(tokens, 0, bracketed=False)
    except _AmbiguousProduct:
        raise QuantityError(text, "has a product after a division, which can be read in two ways",
                            "Put what is divided by in brackets, for example W/(m^2 sr)") from None  # fmt: skip
    except (_Junk, IndexError):
        raise junk from None
    if end < len(tokens):
        raise junk
    for name, _ in factors:
        if name not in UNITS:
            raise QuantityError(text, f"has a unit that is not known ({name})", _suggest_unit(name, kind))
    if len(dict(factors)) < len(factors):
        raise QuantityError(text, "has the same unit twice", _say_due(kind))
    return dict(factors)


def _unraised(text: str, plain: str, kind: str) -> QuantityError | None:
    """For an exponent without its sign (cm2, m-2): what to write."""
    names = [found for found in _UNRAISED.finditer(plain) if found["name"] in UNITS]
    if not names:
        return None
    told = " and ".join(dict.fromkeys(f"{found['name']}^{found['power']}" for found in names))
    due = KINDS[kind].phrase
    return QuantityError(text, f"has an exponent without the sign ^ ({names[0].group()})",
                         f"Write {told}; for {due} fits: {fitting_units(kind)}")  # fmt: skip


class _Junk(Exception):
    """The unit expression breaks the grammar."""


class _AmbiguousProduct(Exception):
    """A product follows a division at the same level."""


def _product(tokens: list[str], position: int, bracketed: bool) -> tuple[list[tuple[str, int]], int]:
    """Factors from `position` to the closing bracket or the end, and where reading stopped.

    Running off the end of `tokens` raises IndexError: something is missing there.
    """
    factors: list[tuple[str, int]] = []
    divided = tokens[position] == "/" and not bracketed
    position += divided
    sign = -1 if divided else 1
    while True:
        found, position = _factor_at(tokens, position, bracketed)
        factors += [(name, sign * exponent) for name, exponent in found]
        if position == len(tokens) or tokens[position] == ")":
            return factors, position
        if tokens[position] == "/":
            divided, sign, position = True, -1, position + 1
        elif divided:
            raise _AmbiguousProduct
        else:
            sign, position = 1, position + (tokens[position] == "*")


def _factor_at(tokens: list[str], position: int, bracketed: bool) -> tuple[list[tuple[str, int]], int]:
    """One name with its exponent, or one pair of brackets."""
    first = tokens[position]
    if first == "(" and not bracketed:
        factors, position = _product(tokens, position + 1, bracketed=True)
        if tokens[position] != ")":
            raise _Junk
        return factors, position + 1
    if not re.fullmatch(r"[A-Za-z%]+", first):
        raise _Junk
    position += 1
    if position == len(tokens) or not tokens[position].startswith("^"):
        return [(first, 1)], position
    exponent = tokens[position][1:].strip()
    if len(exponent) > 2 or not 1 <= abs(int(exponent)) <= 4:
        raise _Junk
    return [(first, int(exponent))], position + 1


def _sorts(exponents: Mapping[str, int]) -> dict[str, int]:
    return {UNITS[name][0]: exponent for name, exponent in exponents.items()}


def _name_misfit(sorts: Mapping[str, int], due: Kind) -> str:
    for other in KINDS.values():
        if sorts in other.forms:
            return f"is {other.phrase}, and {due.phrase} is due"
    return f"is not {due.phrase}"


def _suggest_unit(name: str, kind: str) -> str:
    due = KINDS[kind]
    near = [unit for unit in due.allowed if unit.lower() == name.lower()]
    other = _OTHER_NAMES.get(name) or _OTHER_NAMES.get(name.lower())
    if not near and other:
        near = [other]
    near = near or difflib.get_close_matches(name, due.allowed, n=1, cutoff=0.6)
    hint = f" (perhaps {' or '.join(near)} was meant)" if near else ""
    return f"{_say_due(kind)}{hint}"


@lru_cache(maxsize=1)
def _library() -> Any:
    """The unit library's registry, made once; decimal, so that factors such as 1e-9 are exact."""
    import pint

    return pint.UnitRegistry(non_int_type=Decimal)


@lru_cache(maxsize=512)
def _factor(exponents: tuple[tuple[str, int], ...], target: str) -> Decimal:
    library = _library()
    expression = "*".join(f"{UNITS[name][1]}**{exponent}" for name, exponent in exponents)
    factor = library.Quantity(Decimal(1), library.parse_units(expression)).to(target).magnitude
    return Decimal(factor)


def _kelvin(number: Decimal, unit: str) -> Decimal:
    library = _library()
    return Decimal(library.Quantity(number, library.parse_units(UNITS[unit][1])).to("kelvin").magnitude)
