"""The keys and words of the site file's format that this version does not act on yet.

A key of the format that is read but ignored would be a silent lie, so each of these is refused by name,
with what to do meanwhile. The list is data; a test walks it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

TableName = tuple[str, ...]

_LEAVE = "Leave {it} out of the file"


@dataclass(frozen=True)
class NotBuilt:
    """One key of the format that is refused by name."""

    table: TableName
    """Tables that lead to it: ("particles", "load")."""
    key: str
    example: str
    """A value as the format allows it, in TOML."""
    what: str
    """What it would do, in a few words."""
    mend: str = _LEAVE
    """What to do instead; {it} stands for the key or the table, as the user wrote it."""
    wrong: str = ""
    """Wording in full, where "not built yet" does not say enough."""
    instead_of: tuple[str, ...] = ()
    """Keys that it would stand for: they are not reported missing as well."""

    @property
    def message(self) -> str:
        """What is wrong, for the user."""
        return self.wrong or f"not built yet ({self.what})"

    def advice(self, value: Any) -> str:
        """What to do instead, worded for what the user wrote: a key with its value, or one or more tables."""
        it = "the key"
        if isinstance(value, Mapping):
            it = "the table"
        elif isinstance(value, list) and any(isinstance(entry, Mapping) for entry in value):
            it = "the tables"
        return self.mend.replace("{it}", it)


_POINT = "[0, 0, 2]"
_TOP: TableName = ()
_BEAM: TableName = ("beam",)
_LINE: TableName = ("beam", "line")
_STOP: TableName = ("beam", "beam_stop")
_LOAD: TableName = ("particles", "load")
_REGION: TableName = ("particles", "region")
_OBSERVER: TableName = ("observer",)
_LIMIT: TableName = ("limit",)

_GEOMETRY = "Give the beam's points as path"
_BOXES = 'Use shape = "everywhere", or a box that holds the whole load'

NOT_BUILT: tuple[NotBuilt, ...] = (
    NotBuilt(_TOP, "limit_set", '{ sets = ["icnirp-2013"], confirmed_by = "duty officer" }', "published limit sets",
             "Enter the limits that apply as [[limit]], from the edition held on site"),
    NotBuilt(_TOP, "map", '[{ plane = "horizontal", height = 1.6, from = [0, -4], to = [10, 4] }]', "maps of a plane",
             "Put an observer at each place that matters"),
    NotBuilt(_TOP, "room", "{ from = [0, -4, 0], to = [10, 4, 3], reflectance = 0.5 }", "light returned by walls"),
    NotBuilt(_TOP, "reading", '[{ position = [4, 1.5, 1.6], instrument = "meter" }]', "measured values in the report"),
    NotBuilt(_TOP, "revision", '[{ what = "first issue" }]', "the list of revisions", "Name the revision in reference"),
    NotBuilt(_TOP, "control", '[{ what = "door interlock", who = "duty officer" }]', "control measures in the report"),
    NotBuilt(_TOP, "visual_level", '[{ name = "glare", value = "5 uW/cm^2" }]', "interference with sight"),
    NotBuilt(_TOP, "effort", '{ time = "1 min" }', "how long the computation may take"),
    NotBuilt(_TOP, "datum", '{ height = "120 m" }', "a site datum", "Count heights from z = 0"),
    NotBuilt(_TOP, "screen", "[{ from = [0, 0, 0], to = [1, 0, 2] }]", "screens and partitions"),
    NotBuilt(_TOP, "eyewear", '[{ optical_density = 4 }]', "protective eyewear",
             "Leave it out: the report prints the optical density that brings an exposure to its limit"),
    NotBuilt(_TOP, "scan", '{ rate = "50 Hz" }', "moving beams", "Assess a moving beam by another method",
             "moving beams are not computed; do not put a fixed path in their place"),
    NotBuilt(_BEAM, "from", _POINT, "a path by azimuth and elevation", _GEOMETRY,
             instead_of=("path",)),
    NotBuilt(_BEAM, "azimuth", '"35 deg"', "a path by azimuth and elevation", _GEOMETRY,
             instead_of=("path",)),
    NotBuilt(_BEAM, "elevation", '"20 deg"', "a path by azimuth and elevation", _GEOMETRY,
             instead_of=("path",)),
    NotBuilt(_BEAM, "length", '"6 km"', "a path by azimuth and elevation", _GEOMETRY,
             instead_of=("path",)),
    NotBuilt(_BEAM, "axis_after", '["vertical"]', "the polarization axis after each mirror",
             'Leave it out: after a mirror the worst axis is used where the axis is not certain'),
    NotBuilt(_BEAM, "waist_at", '"2 m"', "beams that are focused along the path",
             "Give diameter at the start of the path and a divergence; a converging beam is not computed"),
    NotBuilt(_BEAM, "scan", '{ rate = "50 Hz" }', "moving beams", "Assess a moving beam by another method",
             "moving beams are not computed; do not put a fixed path in their place"),
    NotBuilt(_LOAD, "visibility", '"100 m"', "a load by visibility",
             'Find out which is meant, and write meteorological_optical_range or visual_range; where nobody knows, '
             "visual_range, which gives the larger load",
             "a bare visibility can mean two things: the meteorological_optical_range, over which 5 % of the light is "
             "left (extinction 2.996 divided by it), or the visual_range, at which contrast falls to 2 % (3.912 "
             "divided by it)",
             ("meteorological_optical_range",)),
    *(NotBuilt(_REGION, key, example, "regions other than everywhere and box", _BOXES) for key, example in (
        ("base", _POINT), ("radius", '"1 m"'), ("height", '"2 m"'), ("centre", _POINT), ("bottom", '"0 m"'),
        ("top", '"3 m"'), ("scale_height", '"8 km"'), ("file", '"profile.csv"'))),
    NotBuilt(_OBSERVER, "within", '{ shape = "box", from = [0, 0, 0], to = [1, 1, 2] }', "search of a region",
             "Give position, and enough observers for the places that people can reach", instead_of=("position",)),
    NotBuilt(_OBSERVER, "looking", "[9, 0, 1.2]", "a direction of gaze", "Leave it out: the worst direction is used"),
    NotBuilt(_OBSERVER, "background", '"80 cd/m^2"', "visibility of the beam"),
    NotBuilt(_OBSERVER, "optical_aid", '{ objective = "50 mm", magnification = 7 }', "binoculars and telescopes",
             "Do not rely on this result where optical aids are used, and leave {it} out of the file"),
    NotBuilt(_OBSERVER, "eyewear", '{ optical_density = 4 }', "protective eyewear",
             "Leave it out: the report prints the optical density that brings an exposure to its limit"),
    NotBuilt(_LIMIT, "replaces", '["RT-4"]', "standing in for published rows"),
    NotBuilt(_LIMIT, "because", '"read in the edition held on site"', "standing in for published rows"),
)  # fmt: skip

NOT_BUILT_STOPS = tuple(
    (word, 'Only finish = "matt" is computed; a mirror-like reflection must be assessed by another method')
    for word in ("glossy", "unknown")
)
NOT_BUILT_REGIONS = tuple(
    (word, _BOXES) for word in ("cylinder", "sphere", "layer", "exponential", "standard atmosphere", "table")
)
