"""The table [[observer]]."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal, cast

from lasescatter.scene import Observer
from lasescatter.site.faults import Fault, Place
from lasescatter.site.fields import PlacePoint, Quantity, Text, Word
from lasescatter.site.ledger import Ledger
from lasescatter.site.table import Seen, Table, choice, key

DEFAULT_REACH = 0.25
"""[m]"""
AVERSION = 0.25
"""Longest exposure that counts as cut short by the aversion response. [s]"""
MOST_DURATIONS = 20
DAY_LIMITS_END = "30000 s"

Duration = Annotated[float, Quantity("time", "1 ns", "24 h", "10 s")]


class ObserverTable(Table):
    """A place where somebody's eye or skin is."""

    name: Annotated[str, Text("a name", "console operator")] = key(
        "Name of the place or role, unique in the file", "console operator"
    )
    position: PlacePoint = key("Where the eyes are", [4, 1.5, 1.6])
    duration: Duration | None = key("Longest single exposure; or give durations", "10 s", default=None)
    durations: tuple[Duration, ...] | None = key(
        "Several exposures, each of them judged", ["10 s", "100 s"], default=None
    )
    daily: Annotated[float, Quantity("time", "1 ns", "24 h", "2 h")] | None = key(
        f"Exposure added up over a day; {DAY_LIMITS_END} where it is left out and matters", "2 h", default=None
    )
    reach: Annotated[float, Quantity("length", "0 m", "10 m", "0.25 m")] | None = key(
        "How far the head moves from position; 0.25 m where it is left out", "0.25 m", default=None
    )
    viewing: Annotated[str, Word(("deliberate", "unintended"))] | None = key(
        "deliberate or unintended; deliberate where it is left out. 0.25 s counts for unintended viewing only",
        "unintended", default=None,
    )  # fmt: skip

    @classmethod
    def rules(cls, seen: Seen) -> Iterator[Fault]:
        durations = seen.get("durations")
        if durations is not None and not 1 <= len(durations) <= MOST_DURATIONS:
            yield Fault(("durations",), f"{len(durations)} durations are given", f"Give 1 to {MOST_DURATIONS} of them")
        if durations != ():
            yield from choice("duration", "durations", seen, 'duration = "10 s"')
        listed: list[tuple[Place, float]] = [(("duration",), seen.get("duration"))] if seen.good("duration") else []
        listed += [(("durations", number), value) for number, value in enumerate(durations or ())]
        viewing = seen.get("viewing") if seen.stated("viewing") else "deliberate"
        for place, value in listed:
            if value <= AVERSION and viewing == "deliberate":
                yield Fault(place, f"{value:g} s is stated for deliberate viewing",
                            '0.25 s counts only for viewing = "unintended" at 400 nm to 700 nm; '
                            "for somebody who may look on purpose give the time they can look: 10 s")  # fmt: skip
        longest = max((value for _, value in listed), default=0.0)
        if seen.good("daily") and longest > seen.get("daily"):
            yield Fault(("daily",), f"the day's sum is shorter than a single exposure ({longest:g} s)",
                        "Give the sum of all exposures in a day")  # fmt: skip

    def to_scene(self, place: Place, ledger: Ledger) -> Observer:
        """The observer in SI, defaults filled in."""
        if self.reach is None:
            ledger.took((*place, "reach"), f"{DEFAULT_REACH:g} m")
        if self.viewing is None:
            ledger.took((*place, "viewing"), "deliberate")
        if self.daily is None:
            ledger.took((*place, "daily"), f"not stated; {DAY_LIMITS_END} where a day's sum is due")
        x, y, z = self.position
        durations = self.durations if self.durations is not None else (cast(float, self.duration),)
        return Observer(
            name=self.name, position=(x, y, z), reach=DEFAULT_REACH if self.reach is None else float(self.reach),
            durations=tuple(float(value) for value in durations),
            daily=None if self.daily is None else float(self.daily),
            viewing=cast(Literal["deliberate", "unintended"], self.viewing or "deliberate"), key=ledger.spell(place),
        )  # fmt: skip
