"""The adaptive number of draws."""

import math

import numpy as np
import pytest

from frontend_sim.errors import MeasureError
from frontend_sim.measure.statistics import (
    block_size,
    numerical_tolerance,
    pass_rate,
    stability,
    tight_enough,
)


@pytest.mark.parametrize(
    ("deviation", "digits", "tolerance"),
    [
        (0.00035, 2, 0.000005),  # JCGM 101:2008, 7.9.2, example 1: 35 x 10^-5 (from memory)
        (0.025, 2, 0.0005),
        (2.0, 1, 0.5),  # example 3 there: one digit of 2 K (from memory)
        (9.96, 2, 0.5),  # rounds to 10
        (0.0, 2, 0.0),
    ],
)
def test_numerical_tolerance(deviation: float, digits: int, tolerance: float) -> None:
    """Half a unit of the last digit that counts."""
    assert numerical_tolerance(deviation, digits) == pytest.approx(tolerance, rel=1e-12)


def test_block_size_of_the_guide() -> None:
    """10 000 draws at 95 and 99 %, 100 000 at 99.9 %; J = 2000 where the floor is taken away."""
    assert [block_size(p) for p in (0.95, 0.99, 0.999)] == [10_000, 10_000, 100_000]
    assert block_size(0.95, least=1) == 2000


def _drawn(generator: np.random.Generator, size: int) -> tuple[int, float]:
    """Draw blocks until they are tight; return how many, and the mean."""
    blocks: list[np.ndarray] = []
    while len(blocks) < 2 or not stability(blocks, digits=1).tight:
        blocks.append(generator.normal(10.0, 2.0, size))
    return len(blocks), float(np.mean(np.concatenate(blocks)))


def test_draws_until_tight_and_no_longer() -> None:
    """A normal measure of deviation 2 is tight to half a unit soon, and its mean within that."""
    nights = [_drawn(np.random.default_rng(seed), 200) for seed in range(60)]
    assert max(count for count, _ in nights) < 40
    wrong = sum(abs(mean - 10.0) > 0.5 for _, mean in nights)
    assert wrong == 0


def test_two_blocks_that_agree_by_chance_prove_nothing() -> None:
    """Student's factor for two blocks is 12.7, not 2: few nights end there that should not."""
    early = 0
    for seed in range(200):
        generator = np.random.default_rng(seed)
        blocks = [generator.normal(0.0, 1.0, 100) for _ in range(2)]
        # Half a unit of the second digit, 0.05, is half the deviation of a block's mean.
        early += stability(blocks, digits=2, coverage=0.9).tight
    assert early == 0


def test_summary_of_all_draws() -> None:
    """Mean, deviation and interval are those of NumPy over all draws."""
    rows = np.random.default_rng(2).normal(size=(5, 400))
    found = stability(list(rows), coverage=0.9, tolerance=1e9)
    assert (found.draws, found.blocks, found.tight) == (2000, 5, True)
    assert found.mean == pytest.approx(rows.mean(), abs=1e-15)
    assert found.deviation == pytest.approx(rows.std(ddof=1), abs=1e-15)
    assert (found.low, found.high) == pytest.approx(tuple(np.quantile(rows, (0.05, 0.95))))
    means = rows.mean(axis=1)
    factor = 2.7764451  # Student's, four degrees of freedom, 97.5 %
    expected = factor * means.std(ddof=1) / math.sqrt(5)
    assert found.spreads[0] == pytest.approx(expected, rel=1e-6)


def test_one_block_is_never_tight() -> None:
    """Of one block nothing can be told."""
    assert not stability([np.zeros(1000)], tolerance=1.0).tight
    assert stability([np.zeros(1000)] * 2).tight


@pytest.mark.parametrize(
    ("blocks", "told"),
    [
        ([], "given are none"),
        ([np.zeros(100), np.zeros(101)], "given are 100, 101"),
        ([np.zeros(10)], "take 40 draws or more, the guide takes 10000"),
        ([np.full(100, np.inf)], "a draw is not finite"),
    ],
)
def test_wrong_blocks(blocks: list[np.ndarray], told: str) -> None:
    """Blocks that cannot answer are refused."""
    with pytest.raises(MeasureError, match=told):
        stability(blocks)


def test_yield_gets_tight() -> None:
    """A yield of 99 % is known to 2 % after 1000 runs, not after 100."""
    assert tight_enough(pass_rate(990, 1000), 0.02)
    assert not tight_enough(pass_rate(99, 100), 0.02)
