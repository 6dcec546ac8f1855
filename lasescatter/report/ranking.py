"""What a reader looks at first: the worst verdicts, the greatest multiples."""

from __future__ import annotations

from lasescatter.assessment.outcome import Assessment, BeamSpot, ObserverOutcome
from lasescatter.limits.verdict import ABOVE, BELOW, NOT_ESTABLISHED, Verdict

ORDER: tuple[Verdict, ...] = (ABOVE, NOT_ESTABLISHED, BELOW)


def counted(assessment: Assessment) -> dict[Verdict, int]:
    """How many observers have each verdict, the worst verdict first."""
    found = {verdict: sum(o.verdict == verdict for o in assessment.observers) for verdict in ORDER}
    return {verdict: count for verdict, count in found.items() if count}


def worst_first(assessment: Assessment) -> list[tuple[int, ObserverOutcome]]:
    """Observers with their numbers, those to look at first in front."""
    return sorted(
        enumerate(assessment.observers, start=1),
        key=lambda pair: (ORDER.index(pair[1].verdict), -(pair[1].ratio or 0.0), pair[0]),
    )


def greatest(spots: list[BeamSpot]) -> BeamSpot | None:
    """The spot with the greatest multiple of the limit; None where none has one."""
    known = [spot for spot in spots if spot.multiple is not None]
    return max(known, key=lambda spot: spot.multiple or 0.0, default=None)
