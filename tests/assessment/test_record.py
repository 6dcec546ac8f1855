"""The record: finite numbers, reasons for nulls, a digest that everything but the time stamp changes."""

from __future__ import annotations

import json
from datetime import UTC, datetime

from assessment.sites import bay, beam, line, replace

from lasescatter.assessment.assess import assess
from lasescatter.assessment.record import digest_of, record, record_text

NOON = datetime(2026, 1, 2, 12, tzinfo=UTC)


def test_same_site_same_numbers_to_the_last_bit():
    first, second = (record(assess(bay(), NOON)) for _ in range(2))
    assert record_text(first) == record_text(second)
    later = record(assess(bay(), datetime(2027, 1, 1, tzinfo=UTC)))
    assert later["digest"] == first["digest"]
    assert later["made_at"] != first["made_at"]


def test_digest_follows_every_number():
    body = record(assess(bay(), NOON))
    assert body["digest"] == digest_of(body)
    body["observers"][0]["scattered_w_m2"] *= 1 + 1e-15
    assert digest_of(body) != body["digest"]


def test_no_infinity_or_nan_even_for_a_beam_that_leaves_the_site():
    straight = replace(line(name="b", key="b"), divergence=0.0)
    path = beam((0.0, 0.0, 1.2), (9.0, 0.0, 1.2), lines=(straight,))
    body = record(assess(bay(beams=(path,)), NOON))
    json.loads(record_text(body), parse_constant=lambda word: (_ for _ in ()).throw(ValueError(word)))
    assert body["in_the_beam"][0]["hazard_distance_m"] is None
    assert "never widens" in body["in_the_beam"][0]["reason"]
    assert body["observers"][0]["legs"][0]["length_m"] is None
    assert body["observers"][0]["legs"][0]["length_reason"]


def test_nulls_have_their_reason_beside_them():
    body = record(assess(bay(), NOON))
    for observer in body["observers"]:
        assert observer["higher_orders_w_m2"] is None and observer["higher_orders_reason"]
        assert observer["beam_visibility"] is None and observer["beam_visibility_reason"]
