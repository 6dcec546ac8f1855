"""A wavelength that a load's data do not reach: left out, named, never below; what is above stays above."""

from __future__ import annotations

import pytest
from assessment.sites import LoadReading, bay, haze, limit, line, observer, replace, skin

from lasescatter.assessment.assess import assess
from lasescatter.assessment.record import record
from lasescatter.matter import HenyeyGreenstein, IndexTable, Material, Trust

VISIBLE = IndexTable((355e-9, 1064e-9), (1.43, 1.42), (1e-7, 1e-6), (False, False), "invented glycol", "nowhere")


def kind(**changes):
    return haze(**{"kind": "glycol haze", "material": Material(VISIBLE, 1060.0), **changes})


def infrared(load, **changes):
    lit = replace(bay().beams[0].lines[0], wavelength=10.6e-6, divergence=6e-3)
    far = limit(name="front", tissue="cornea and lens", wavelengths=(1.4e-6, 1e-3), value=1000.0)
    values = {
        "beams": (replace(bay().beams[0], lines=(lit,)),),
        "limits": (far, skin(wavelengths=(1.4e-6, 1e-3))),
        "loads": (load,),
        **changes,
    }
    return assess(bay(**values))


def test_not_established_with_kind_wavelength_and_range():
    found = infrared(kind())
    assert found.observers[0].verdict == "not established"
    (reason,) = [reason for reason in found.observers[0].reasons if "glycol haze" in reason]
    for told in ("10600 nm", "355", "1064", "left out", "invented glycol"):
        assert told in reason
    assert reason in found.gaps
    assert [c.name for c in found.components] == []
    assert reason in record(found)["gaps"]


def test_above_stays_above():
    inside = observer(position=(4.0, 0.001, 1.2))
    found = infrared(kind(), observers=(inside,))
    assert found.observers[0].verdict == "above limit"
    assert any("left out" in reason for reason in found.observers[0].reasons)


def test_other_loads_and_wavelengths_still_count():
    own = haze(name="own index", key="2", reading=LoadReading("number", 1e9))
    lines = (bay().beams[0].lines[0], replace(line(name="far", key="far", wavelength=10.6e-6), divergence=6e-3))
    far = limit(name="front", tissue="cornea and lens", wavelengths=(1.4e-6, 1e-3), value=1000.0)
    path = replace(bay().beams[0], lines=lines)
    scene = bay(beams=(path,), loads=(kind(), own), limits=(*bay().limits, far, skin(wavelengths=(400e-9, 1e-3))))
    found = assess(scene)
    present = {(c.name, round(c.wavelength * 1e9)) for c in found.components}
    assert present == {("air", 532), ("test haze", 532), ("own index", 532), ("own index", 10600)}
    assert found.observers[0].lines[1].scattered > 0
    assert found.observers[0].verdict == "not established"


def test_reading_outside_the_data_leaves_the_load_out_everywhere():
    near = IndexTable((700e-9, 1064e-9), (1.43, 1.42), (1e-7, 1e-6), (False, False), "invented glycol", "nowhere")
    lit = replace(bay().beams[0].lines[0], wavelength=800e-9)
    load = kind(material=Material(near, 1060.0), reading=LoadReading("extinction", 0.01, 550e-9))
    eye = limit(wavelengths=(400e-9, 1400e-9))
    found = assess(bay(beams=(replace(bay().beams[0], lines=(lit,)),), loads=(load,), limits=(eye, skin())))
    assert found.observers[0].verdict == "not established"
    assert any("reading" in gap and "550 nm" in gap and "700" in gap for gap in found.gaps)
    by_mass = replace(load, reading=LoadReading("mass", 1e-6))
    known = assess(bay(beams=(replace(bay().beams[0], lines=(lit,)),), loads=(by_mass,), limits=(eye, skin())))
    assert known.gaps == ()
    assert known.observers[0].verdict == "below limit"


def test_within_the_data_there_is_no_gap():
    found = assess(bay(loads=(kind(trust=Trust("checked", 1.5, "seen")),)))
    assert found.gaps == ()
    assert found.observers[0].verdict == "below limit"
    haze_summary = next(c for c in found.components if c.name == "test haze")
    share = (532 - 355) / (1064 - 355)
    assert haze_summary.index.real == pytest.approx(1.43 - 0.01 * share, rel=1e-12)
    assert haze_summary.kind == "glycol haze"


def test_rows_say_what_the_observer_is_told_and_gaps_name_component_and_wavelength():
    found = infrared(kind())
    (person,) = found.observers
    assert {h.verdict for h in person.hazards} == {c.verdict for c in person.comparisons} == {"not established"}
    body = record(found)["observers"][0]
    assert {row["verdict"] for row in (*body["hazards"], *body["comparisons"])} == {"not established"}
    entries = {(gap.component, gap.wavelength): gap for gap in found.gap_entries}
    assert set(entries) == {("air", 10.6e-6), ("test haze", 10.6e-6)}
    assert all(gap.left_out and gap.reason in found.gaps for gap in found.gap_entries)


def test_a_stand_in_read_elsewhere_is_a_gap_that_is_not_left_out():
    cloud = haze(
        modes=(), material=None, stand_in=HenyeyGreenstein(0.7), albedo=0.9,
        reading=LoadReading("extinction", 0.01, 550e-9),
    )  # fmt: skip
    (gap,) = assess(bay(loads=(cloud,))).gap_entries
    assert (gap.component, gap.wavelength, gap.left_out) == ("test haze", 532e-9, False)
