"""Optics of the site's air and loads at each wavelength: the mixtures that scatter, and what is not known of them."""

from __future__ import annotations

from lasescatter.assessment.outcome import Gap
from lasescatter.assumptions import Assumption
from lasescatter.limits.judge import is_placeholder
from lasescatter.matter import Material, Trust
from lasescatter.medium.atmosphere import air_profile
from lasescatter.medium.load import Concentration, concentration
from lasescatter.medium.mixture import Component, Mixture
from lasescatter.medium.profiles import profile_of
from lasescatter.optics.air import LONGEST_WAVELENGTH, SHORTEST_WAVELENGTH, AirRangeError, air_optics
from lasescatter.optics.growth import Floating, HumidityError, as_they_float
from lasescatter.optics.indices import IndexRangeError
from lasescatter.optics.measured import MatrixError, stand_in_optics
from lasescatter.optics.mie import MieSpace, SizeRangeError
from lasescatter.optics.sizes import Accuracy, ParticleOptics, particle_optics
from lasescatter.problems import Problem, SiteError
from lasescatter.scene import Load, Scene

AIR = "air"

UNIFORM_AIR = Assumption(
    name="Air is the same all over the site, with 360 ppm of carbon dioxide",
    direction="high",
    size="thinner air aloft is not credited: 1 % in 100 m; today's 430 ppm scatter 0.01 % more",
    source="U.S. Standard Atmosphere 1976; Bodhaine et al. 1999",
)
SIZE_AVERAGE = Assumption(
    name="The average over particle sizes is a finite sum",
    direction="either",
    size="by the error printed with each component, which the bounds of every ratio carry; 1e-3 is aimed at",
    source="comparison of N with 2N radii",
)
DOUBTED_THICKNESS = Assumption(
    name="The optical thickness of a load that was not read at the beam's wavelength is as computed",
    direction="either",
    size="by the factor of trust, where the reading is a mass or a number; by the spectrum, (ratio of wavelengths)⁴ "
    "and that factor at most, where it is optical. The allowance for higher orders and the light from walls carry it "
    "in the upper bounds, each load with its own factor; above 2 with these factors nothing is below its limit, while "
    "the step at 0.5 is taken as computed",
    source="steepest spectrum: Rayleigh scattering; the rest: common practice, no source",
)

DRY_AIR = Assumption(
    name="The air is taken as dry although its humidity is not stated",
    direction="low",
    size="particles that take up water send more light than dry ones: at a humidity of 90 %, for a load by its dry "
    "mass or by number, 1.4 to 7.3 times as much to the side and up to 14 times near the beam's direction; by its mass "
    "as they float up to 2.1 and 3 times; by an optical reading at 550 nm up to 1.5 and 3 times. By mass or number "
    "nothing is below its limit until the humidity is stated",
    source="the catalogue's kinds at 90 % compared with dry air, 450–1064 nm, 30–155° and 5–175°",
)

# At wavelengths where an index is unconfirmed a load is trusted no better than so.
UNCONFIRMED_FACTOR = 3.0
# An optical reading holds within so much of its own wavelength. [m]
SAME_WAVELENGTH = 1e-9
# No sphere that absorbs little has a spectrum steeper than small ones: extinction falls with this power at most.
STEEPEST_SPECTRUM = 4


def is_vouched(load: Load) -> bool:
    """Whether somebody vouches that a load neither thins nor clears; a placeholder is nobody."""
    return load.steady_by is not None and not is_placeholder(load.steady_by)


def humidity_is_stated(scene: Scene) -> bool:
    """Whether the humidity of a site's air is somebody's word; a scene that was not read from a file states its air."""
    return all(entry.stated for entry in scene.inputs if entry.key == "air.relative_humidity")


def takes_up_water(material: Material | None) -> bool:
    """Whether particles of a material grow in moist air."""
    if material is None or material.growth is None:
        return False
    return bool(material.growth.kappa) or any(factor > 1 for _, factor in material.growth.factors)


class SiteOptics:
    """Optics of a scene: each load as it floats in the air of the site, each wavelength computed once.

    Parameters
    ----------
    accuracy : Accuracy, optional
        Of the averages over sizes.
    """

    def __init__(self, scene: Scene, accuracy: Accuracy | None = None) -> None:
        self.scene = scene
        self._accuracy = accuracy
        self._space = MieSpace()
        self._floating: dict[Load, Floating] = {}
        self._optics: dict[tuple[object, ...], ParticleOptics] = {}
        self._amounts: dict[Load, Concentration] = {}
        self._faults: dict[tuple[Load, float], str] = {}

    @property
    def wavelengths(self) -> tuple[float, ...]:
        """Of all lines, each once. [m]"""
        return tuple(dict.fromkeys(line.wavelength for beam in self.scene.beams for line in beam.lines))

    def floating(self, load: Load) -> Floating | None:
        """A load's particles with the water they have taken up; None for a stand-in.

        Raises
        ------
        SiteError
            If the air is more humid than growth is computed for.
        """
        if load.stand_in is not None:
            return None
        if load not in self._floating:
            air = self.scene.air
            try:
                self._floating[load] = as_they_float(load.modes, load.material, air.relative_humidity, air.temperature)
            except HumidityError as fault:
                raise SiteError(
                    [
                        Problem(
                            "air.relative_humidity",
                            f"{fault}; {load.key} takes up water",
                            "Give a humidity within that range, or enter the load by its wet sizes and index",
                        )
                    ]
                ) from fault
        return self._floating[load]

    def grows_by_kappa(self, load: Load) -> bool:
        """Whether some of a load's particles have taken up water by kappa-Köhler theory."""
        floating = self.floating(load)
        if floating is None:
            return False
        growths = [material.growth for material in floating.materials]
        return any(
            g is not None and g.kappa is not None and f > 1 for g, f in zip(growths, floating.factors, strict=True)
        )

    def humidity_missing(self, load: Load) -> bool:
        """Whether a load's particles take up water, and the site file does not say how humid the air is."""
        materials = (load.material, *(mode.material for mode in load.modes))
        return any(takes_up_water(material) for material in materials) and not humidity_is_stated(self.scene)

    def dry_by_default(self, wavelength: float) -> tuple[str, ...]:
        """Why the light at a wavelength may be low for want of the humidity: loads by mass or number, which do not
        fix the extinction of particles that grow."""
        return tuple(
            f'the humidity of the air is not stated and "{load.name}" takes up water: state air.relative_humidity'
            for load in self.present(wavelength)
            if load.reading.kind in ("mass", "number") and self.humidity_missing(load)
        )

    def of(self, load: Load, wavelength: float) -> ParticleOptics:
        """Optics of a load's particles.

        Raises
        ------
        IndexRangeError
            If the wavelength is outside the data of an index.
        SiteError
            If the sizes are outside what Mie sums are made for, or the air is too humid.
        """
        floating = self.floating(load)
        if floating is None:
            key: tuple[object, ...] = (load.stand_in, load.albedo, wavelength)
            if key not in self._optics:
                assert load.stand_in is not None and load.albedo is not None  # no floating particles: a stand-in
                try:
                    self._optics[key] = stand_in_optics(load.stand_in, load.albedo, wavelength)
                except MatrixError as fault:
                    mend = "Give its rows closer together, above all where F11 is steep"
                    raise SiteError([Problem(f"{load.key}.matrix_file", str(fault), mend)]) from fault
            return self._optics[key]
        indices = floating.indices(wavelength)
        key = (floating.modes, indices, wavelength)
        if key not in self._optics:
            index = indices[0] if len(set(indices)) == 1 else indices
            try:
                self._optics[key] = particle_optics(
                    floating.modes, index, wavelength, accuracy=self._accuracy, space=self._space
                )
            except SizeRangeError as fault:
                raise SiteError([Problem(f"{load.key}.sizes", str(fault), "Give sizes within that range")]) from fault
        return self._optics[key]

    def concentration(self, load: Load) -> Concentration:
        """How much of a load there is.

        Raises
        ------
        IndexRangeError
            If its reading needs an index that is not known.
        """
        if load not in self._amounts:
            known = [at for at in self.wavelengths if not self._unknown(load, at)] or self.wavelengths
            self._amounts[load] = concentration(load, self.floating(load), lambda at: self.of(load, at), known[0])
        return self._amounts[load]

    def _unknown(self, load: Load, wavelength: float) -> str:
        """Why the index at a wavelength is not known; "" where it is."""
        floating = self.floating(load)
        if floating is not None:
            try:
                floating.indices(wavelength)
            except IndexRangeError as fault:
                return str(fault)
        return ""

    def fault(self, load: Load, wavelength: float) -> str:
        """Why a load is left out at a wavelength; "" where it is not."""
        key = (load, wavelength)
        if key not in self._faults:
            self._faults[key] = self._fault(load, wavelength)
        return self._faults[key]

    def _fault(self, load: Load, wavelength: float) -> str:
        unknown = self._unknown(load, wavelength)
        if unknown:
            return f"{_called(load)} is left out at {_nm(wavelength)}: {unknown}"
        try:
            self.concentration(load)
        except IndexRangeError as fault:
            return f"{_called(load)} is left out: its reading cannot be carried to the beam's wavelength: {fault}"
        return ""

    def trust(self, load: Load, wavelength: float) -> Trust:
        """How far a load is trusted at a wavelength."""
        floating = self.floating(load)
        if floating is None or load.trust.factor >= UNCONFIRMED_FACTOR:
            return load.trust
        asked = [wavelength] + ([] if load.reading.at is None else [load.reading.at])
        seen = [at for at in asked if floating.unconfirmed(at)]
        if not seen:
            return load.trust
        at = " and ".join(dict.fromkeys(_nm(w) for w in seen))
        reason = f"the refractive index at {at} has not been confirmed; apart from that: {load.trust.reason}"
        return Trust("weak", UNCONFIRMED_FACTOR, reason)

    def component(self, load: Load, wavelength: float) -> Component:
        """One load at one wavelength."""
        optics, amount, trust = self.of(load, wavelength), self.concentration(load), self.trust(load, wavelength)
        return Component(
            name=load.name,
            extinction=amount.extinction(optics),
            scattering=amount.scattering(optics),
            matrix=optics.matrix,
            profile=profile_of(load.region),
            steady=is_vouched(load),
            error=optics.error_f11,
            trust=trust.factor,
            mark=trust.mark,
            extinction_trust=extinction_trust(load, wavelength, trust.factor),
        )

    def present(self, wavelength: float) -> tuple[Load, ...]:
        """The loads that are not left out at a wavelength."""
        return tuple(load for load in self.scene.loads if not self.fault(load, wavelength))

    def mixture(self, wavelength: float) -> Mixture:
        """Air and the loads at a wavelength, in the order of the scene.

        What the data do not reach is left out, and `gaps` says so: no value is extrapolated.
        """
        loads = (self.component(load, wavelength) for load in self.present(wavelength))
        return Mixture((self._air(wavelength), *loads))

    def _air(self, wavelength: float) -> Component:
        air = self.scene.air
        nearest = min(max(wavelength, SHORTEST_WAVELENGTH), LONGEST_WAVELENGTH)
        try:
            molecules = air_optics(nearest, air.temperature, air.pressure, air.relative_humidity)
        except AirRangeError as fault:
            raise SiteError([Problem("air", str(fault), "Give a value within that range")]) from fault
        scattering = molecules.scattering if nearest == wavelength else 0.0
        return Component(AIR, scattering, scattering, molecules.matrix, air_profile(air), True)

    def gaps(self, wavelength: float) -> tuple[Gap, ...]:
        """What scatters at a wavelength and is not known there; empty where all is."""
        found = []
        if not SHORTEST_WAVELENGTH <= wavelength <= LONGEST_WAVELENGTH:
            reason = (
                f"scattering by air at {_nm(wavelength)} is outside the data "
                f"({SHORTEST_WAVELENGTH * 1e9:g}–{LONGEST_WAVELENGTH * 1e9:g} nm) and left out"
            )
            found.append(Gap(AIR, wavelength, reason, left_out=True))
        for load in self.scene.loads:
            fault = self.fault(load, wavelength)
            if fault:
                found.append(Gap(load.name, wavelength, fault, left_out=True))
            elif load.stand_in is not None and not _is_at(load, wavelength):
                reason = (
                    f'extinction of "{load.name}" at {_nm(wavelength)} is not known: it was read at '
                    f"{_nm(load.reading.at or 0.0)} and no sizes are given; the reading is used unchanged"
                )
                found.append(Gap(load.name, wavelength, reason, left_out=False))
        return tuple(found)


def extinction_trust(load: Load, wavelength: float, factor: float) -> float:
    """Factor by which a load's extinction at a wavelength may be off, where its light may be off by `factor`.

    Mass and number do not fix the extinction. An optical reading does, at its own wavelength; beside it the spectrum
    may be wrong by the steepest one of spheres that absorb little, and by no more than the light.
    """
    if load.reading.kind in ("mass", "number"):
        return factor
    if _is_at(load, wavelength):
        return 1.0
    at = load.reading.at or wavelength
    return min(factor, (max(at, wavelength) / min(at, wavelength)) ** STEEPEST_SPECTRUM)


def _is_at(load: Load, wavelength: float) -> bool:
    at = load.reading.at
    return at is None or abs(at - wavelength) <= SAME_WAVELENGTH * (1 + 1e-6)


def _called(load: Load) -> str:
    return f'"{load.name}"' + (f' (kind "{load.kind}")' if load.kind else "")


def _nm(wavelength: float) -> str:
    return f"{wavelength * 1e9:g} nm"
