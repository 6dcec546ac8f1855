"""How far the optics of a load are trusted, and what that does to a verdict, in words."""

from __future__ import annotations

from lasescatter.matter import Trust
from lasescatter.report.quantities import trimmed

_MARKS = {
    "entered": "entered by the user",
    "checked": "checked",
    "weak": "weak",
    "non-spheres": "non-spheres taken as spheres",
    "stand-in": "stand-in",
}


def trust_word(trust: Trust) -> str:
    """The mark and its factor: "weak, factor 3"."""
    if trust.mark == "entered" and trust.factor > 1:
        # No doubt about the user's own data: without F12 nothing is known of the light's polarization.
        return f"{_MARKS[trust.mark]}, no F12 given"
    return f"{_MARKS[trust.mark]}, factor {trimmed(trust.factor)}"


def trust_effect(trust: Trust) -> str:
    """What the factor does to a verdict."""
    if trust.factor == 1:
        return "No factor is put on the light that it scatters."
    factor = trimmed(trust.factor)
    return (
        f"The light that it scatters may be up to {factor} times what is computed: below limit is said only where "
        f"{factor} times that light, with everything else that arrives, stays within the limit; where it does not, "
        "the verdict is not established."
    )
