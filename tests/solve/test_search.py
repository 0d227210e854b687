"""The search finds the boundaries of any predicate, within its tolerance, in few trials."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.solve.domain import Continuous, Domain, Members, whole_numbers
from frontend_sim.solve.search import Search

LOG = Continuous(1.0, 1e4, 1e-4, "log")
LINEAR = Continuous(-2.0, 3.0, 1e-4, "linear")


def searched(domain: Domain, score: object, points: int = 17) -> Search:
    """Return a finished search."""
    search = Search(domain, score, points)  # type: ignore[arg-type]  # a lambda in every test
    search.run()
    assert search.finished
    return search


@settings(max_examples=200, deadline=None)
@given(threshold=st.floats(0.5, 2e4), rising=st.booleans())
def test_one_threshold_on_a_logarithmic_scale(threshold: float, rising: bool) -> None:
    """The threshold lies between two neighbours that differ by no more than the tolerance."""
    sign = 1.0 if rising else -1.0
    search = searched(LOG, lambda x: sign * (x - threshold))
    found = search.boundaries()
    # The threshold itself passes, so on a bound it parts nothing from the side that passes too.
    parts = LOG.low < threshold <= LOG.high if rising else LOG.low <= threshold < LOG.high
    if not parts:
        assert found == ()
        return
    (boundary,) = found
    low, high = sorted([boundary.passes, boundary.fails])
    assert low <= threshold <= high
    assert high - low <= 1e-4 * high * (1.0 + 1e-9)
    assert boundary.rising == rising
    assert len(search.known) <= search.most


@settings(max_examples=200, deadline=None)
@given(threshold=st.floats(-2.5, 3.5), flat=st.booleans())
def test_one_threshold_across_zero(threshold: float, flat: bool) -> None:
    """The same on a linear scale with zero inside, also where the score says no more than yes."""
    search = searched(
        LINEAR, lambda x: math.copysign(1.0, x - threshold) if flat else x - threshold
    )
    for boundary in search.boundaries():
        low, high = sorted([boundary.passes, boundary.fails])
        assert low <= threshold <= high
        assert high - low <= 3e-4 * (1.0 + 1e-9)
    # A threshold on the upper bound itself passes there with a score of zero.
    assert len(search.boundaries()) == (LINEAR.low < threshold <= LINEAR.high)


@settings(max_examples=200, deadline=None)
@given(
    ends=st.lists(st.floats(0.5, 9.5), min_size=1, max_size=6, unique=True).map(sorted),
    first=st.booleans(),
)
def test_all_boundaries_wider_apart_than_the_points(ends: list[float], first: bool) -> None:
    """Of any number of boundaries that lie wider apart than the points none is missed."""
    kept = [end for end, before in zip(ends, [0.0, *ends], strict=False) if end - before > 0.3]
    domain = Continuous(0.0, 10.0, 1e-4, "linear")
    kept = [end for end, after in zip(kept, [*kept[1:], 10.0], strict=True) if after - end > 0.3]

    def score(x: float) -> float:
        crossed = sum(end <= x for end in kept)
        return 1.0 if (crossed % 2 == 0) == first else -1.0

    found = searched(domain, score, 51).boundaries()
    assert len(found) == len(kept)
    for boundary, end in zip(found, kept, strict=True):
        low, high = sorted([boundary.passes, boundary.fails])
        assert low < end <= high
        assert high - low <= 1e-3 * (1.0 + 1e-9)


@settings(max_examples=100, deadline=None)
@given(values=st.lists(st.booleans(), min_size=2, max_size=17))
def test_few_values_are_all_looked_at(values: list[bool]) -> None:
    """Where there are no more values than points, every boundary is found, however they jump."""
    domain = whole_numbers(0.0, len(values) - 1.0)
    search = searched(domain, lambda x: 1.0 if values[int(x)] else -1.0)
    assert len(search.known) == len(values)
    expected = [place for place, (a, b) in enumerate(pairwise(values)) if a != b]
    found = [min(each.passes, each.fails) for each in search.boundaries()]
    assert found == expected


@settings(max_examples=100, deadline=None)
@given(count=st.integers(2, 500), share=st.floats(0.0, 1.0))
def test_the_boundary_between_members_is_exact(count: int, share: float) -> None:
    """Among members that no number lies between, the two are neighbours."""
    domain = Members(tuple(float(place) ** 2 for place in range(count)), "squares")
    edge = 1 + round(share * (count - 2))
    search = searched(domain, lambda x: x - float(edge) ** 2)
    (boundary,) = search.boundaries()
    assert (boundary.passes, boundary.fails) == (float(edge) ** 2, float(edge - 1) ** 2)
    assert len(search.known) <= search.most


@settings(max_examples=100, deadline=None)
@given(centre=st.floats(2.0, 5e3), width=st.floats(0.02, 0.5))
def test_a_window_between_points_is_found_by_the_scores(centre: float, width: float) -> None:
    """A window narrower than the points lie apart shows in the scores of those that fail."""
    search = searched(LOG, lambda x: width - abs(math.log(x / centre)))
    found = search.boundaries()
    inside = [x for x, score in search.known.items() if score >= 0.0]
    assert inside, "the window was missed"
    for boundary in found:
        assert abs(math.log(boundary.passes / centre)) <= width
        assert abs(math.log(boundary.fails / centre)) > width


def test_a_window_near_a_bound_is_found() -> None:
    """Between the bound and the next point no neighbour tells of a peak: the way is halved."""
    domain = Continuous(100.0, 1e5, 1e-4, "linear")
    search = searched(domain, lambda x: min(x / 2e3, 4.7e3 / x) - 1.1, 9)
    low, high = search.boundaries()
    assert low.passes == pytest.approx(2.2e3, rel=1.1e-4)
    assert high.passes == pytest.approx(4.7e3 / 1.1, rel=1.1e-4)


def test_a_gap_in_what_passes_is_found_too() -> None:
    """The same upside down: something fails in the middle of what passes."""
    found = searched(LOG, lambda x: abs(math.log(x / 33.0)) - 0.05).boundaries()
    assert [each.rising for each in found] == [False, True]


def test_each_value_is_scored_once() -> None:
    """Trials are dear: none is made twice."""
    seen: list[float] = []
    searched(LOG, lambda x: (seen.append(x), x - 77.0)[1])
    assert len(seen) == len(set(seen))


def test_what_is_known_survives_an_interruption() -> None:
    """An exception passes through, and what was found until then can still be read."""
    count = 0

    def score(x: float) -> float:
        nonlocal count
        count += 1
        if count > 20:
            raise KeyboardInterrupt
        return x - 77.0

    search = Search(LOG, score)
    with pytest.raises(KeyboardInterrupt):
        search.run()
    assert not search.finished
    assert len(search.known) == 20
    assert len(search.boundaries()) == 1


def test_a_verdict_that_jumps_about_ends() -> None:
    """A predicate without any order costs a bounded number of trials."""
    search = searched(LOG, lambda x: 1.0 if int(1e6 * x) % 3 else -1.0)
    assert len(search.known) < 17 + 40 * 20


def test_values_without_a_number_fail() -> None:
    """Minus infinity is a value that cannot be run: it fails, and gives no direction."""
    search = searched(LOG, lambda x: 1.0 if x > 50.0 else -math.inf)
    (boundary,) = search.boundaries()
    assert boundary.fails <= 50.0 < boundary.passes
