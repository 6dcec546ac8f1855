"""A load stated on the command line, read as the site file's table of loads."""

from __future__ import annotations

import json
import re
from dataclasses import replace

from lasescatter.problems import Problem, SiteError
from lasescatter.scene import LoadReading

_PAIR = re.compile(r"\s*([A-Za-z_]{1,60})\s*=\s*(.*?)\s*", re.DOTALL)
_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?")
_EXAMPLE = '"mass=8 mg/m^3" or "transmittance=0.8, over=3 m, at=650 nm"'
LONGEST = 1000


def load_reading(text: str, common_wavelength: float | None, grows: bool) -> LoadReading:
    """Keys and values, as in the table [particles.load] of a site file, to a reading in SI.

    Parameters
    ----------
    text : str
        "mass=8 mg/m^3" or "transmittance=0.8, over=3 m, at=650 nm".
    common_wavelength : float or None
        Of the call, where it has but one; an extinction reading may then leave `at` out. [m]
    grows : bool
        Whether the particles take up water.

    Raises
    ------
    SiteError
        In the words of the site file.
    """
    from pydantic import ValidationError

    from lasescatter.site.fields import Reading
    from lasescatter.site.ledger import Ledger
    from lasescatter.site.load import LoadTable
    from lasescatter.site.spelling import with_placeholders
    from lasescatter.site.syntax import parsed
    from lasescatter.site.wording import known_fields, problems_of

    pairs = _pairs(text)
    written = "\n".join(f"{name} = {_toml(value)}" for name, value in pairs.items())
    document, index = parsed(f"[[particles]]\n[particles.load]\n{written}\n", "command line")
    table = with_placeholders(document, known_fields())["particles"][0]["load"]
    try:
        load = LoadTable.model_validate(table, context=Reading(None))
    except ValidationError as error:
        faults = [{**fault, "loc": ("particles", 0, "load", *fault["loc"])} for fault in error.errors()]
        raise SiteError([_told(problem) for problem in problems_of(faults, document, index)], "command line") from None
    if load.extinction is not None and load.at is None and common_wavelength is None:
        raise _refused("the key is missing", "There are several wavelengths: say at which one the extinction was "
                       "measured, for example at=532 nm", "at")  # fmt: skip
    ledger = Ledger(document, index)
    return load.to_scene(("particles", 0, "load"), ledger, common_wavelength, grows)


def _pairs(text: str) -> dict[str, str]:
    if len(text) > LONGEST:
        raise _refused(f"the load has {len(text)} characters", f"Write for example {_EXAMPLE}")
    pairs: dict[str, str] = {}
    for part in text.split(","):
        found = _PAIR.fullmatch(part)
        if found is None:
            shown = json.dumps(part.strip()[:60], ensure_ascii=False)
            raise _refused(f"{shown} is no key with its value", f"Write for example {_EXAMPLE}; a point for decimals")
        if found[1] in pairs:
            raise _refused("the key is given twice", "Keep one of them", found[1])
        pairs[found[1]] = found[2]
    return pairs


def _toml(value: str) -> str:
    """A value as the site file has it: plain numbers bare, all else in quotes."""
    bare = value.strip('"')
    if _NUMBER.fullmatch(bare) and bare == value:
        return repr(float(value))
    return json.dumps(bare, ensure_ascii=True)


def _told(problem: Problem) -> Problem:
    key = problem.key.partition(".load")[2].lstrip(".")
    return replace(problem, key=f"--load {key}".rstrip(), line=None)


def _refused(wrong: str, mend: str, key: str = "") -> SiteError:
    return SiteError([Problem(f"--load {key}".rstrip(), wrong, mend)], "command line")
