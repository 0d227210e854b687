"""An amplifier that cannot slew faster, nor swing further, than its supply lets it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Block, Real
from frontend_sim.analog.limits.clipping import Clipping
from frontend_sim.analog.limits.follower import NAMES, SlewFollower
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched, continuous
from frontend_sim.errors import ModelError


@dataclass(frozen=True)
class AmplifierLimits:
    """What the output of an amplifier cannot exceed; what is None does not limit.

    Parameters
    ----------
    slew_rate : steepest rise, above 0 [V/s]
    output_low, output_high : the output's rails [V]
    slew_rate_down : steepest fall, where it differs from ``slew_rate``, above 0 [V/s]
    block : which of the stage's blocks ends at the amplifier's output, as an index

    Raises
    ------
    ValueError
        If a slew rate is not above zero, or the rails are reversed.
    """

    slew_rate: float | None = None
    output_low: float | None = None
    output_high: float | None = None
    slew_rate_down: float | None = None
    block: int = -1

    def __post_init__(self) -> None:
        """Refuse limits that no amplifier has."""
        for key in ("slew_rate", "slew_rate_down"):
            rate = getattr(self, key)
            if rate is not None and not rate > 0.0:
                raise ValueError(f"{key} {rate:g} V/s must be above 0; leave it out for no limit")
        if not self.low < self.high:
            raise ValueError(
                f"the rails are reversed: output_low {self.low:g} V must lie below output_high "
                f"{self.high:g} V"
            )

    @property
    def low(self) -> float:
        """The lower rail, or minus infinity [V]."""
        return -math.inf if self.output_low is None else self.output_low

    @property
    def high(self) -> float:
        """The upper rail, or infinity [V]."""
        return math.inf if self.output_high is None else self.output_high

    @property
    def up(self) -> float:
        """Steepest rise, or infinity [V/s]."""
        return math.inf if self.slew_rate is None else self.slew_rate

    @property
    def down(self) -> float:
        """Steepest fall, or infinity [V/s]."""
        return self.up if self.slew_rate_down is None else self.slew_rate_down

    @property
    def any(self) -> bool:
        """Whether anything limits."""
        return not all(math.isinf(limit) for limit in (self.up, self.down, self.low, self.high))

    def around(self, blocks: Sequence[Block]) -> Limiter | None:
        """Return the limiter for a stage with these blocks, None if nothing limits.

        A block of first order is the closed loop itself, see ``ClosedLoop``. A gain is ideal: its
        output follows as fast as the slew rate lets it. Circuits of more than that are the matter
        of ``AmplifierLoop``.

        Raises
        ------
        ModelError
            If the block has a pole at the origin, or is neither of the two.
        """
        if not self.any:
            return None
        at = range(len(blocks))[self.block]
        block, replaced = blocks[at], range(at, at + 1)
        if block.order == 1 and block.d == 0.0:
            return self._closed_loop(block, replaced)
        if block.order:
            raise ModelError(
                f"limits stand for a gain or a single pole, not for a block of order {block.order}"
            )
        if math.isinf(self.up) and math.isinf(self.down):
            return Clipping(replaced, block.d, self.low, self.high)
        return SlewFollower(replaced, block.d, self.up, self.down, self.low, self.high)

    def _closed_loop(self, block: Block, replaced: range) -> Limiter:
        rate = -float(block.a[0, 0])
        if not rate > 0.0:
            raise ModelError(
                "limits of an amplifier need a closed loop with a pole left of the origin; an "
                "integrator with limits is not modelled"
            )
        gain = float(block.c[0] * block.b[0]) / rate
        return ClosedLoop(replaced, rate, gain, self.up, self.down, self.low, self.high)


@dataclass(frozen=True, eq=False)
class ClosedLoop(Limiter):
    """A closed loop of first order whose integrating state is limited in slope and in value,

        dy/dt = clip(w (G u - y), -down, up),    low <= y <= high,

    and is held at a rail for just as long as the loop drives it outwards: it leaves the rail at
    the instant G u comes back, with nothing to unwind. Between two events each piece has a closed
    form; see docs/theory/limits.md.

    Parameters
    ----------
    rate : w [rad/s];  gain : G [1];  up, down : [V/s];  low, high : [V]
    """

    replaced: range
    rate: float
    gain: float
    up: float
    down: float
    low: float
    high: float
    limits = NAMES

    def start(self, u: float, v: float) -> Real:
        """Return the deviation of an output that rests, at a rail if need be."""
        y = min(max(v, self.low), self.high)
        return np.array([y - v, y])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance event by event; the deviation never jumps, since y and v are states."""
        from frontend_sim.analog.limits.kernels import closed_loop

        touched, deviation = Touched.none(4), np.empty(len(span.length))
        parts = (span.length, span.begin, span.end, span.linear)
        limits = (self.rate, self.gain, self.up, self.down, self.low, self.high)
        told = (touched.time, touched.piece, touched.since)
        at = float(state[0]), float(state[1]), span.linear_begin
        ends = closed_loop(*at, *parts, span.apart, *limits, deviation, *told)
        return np.array(ends), deviation, continuous(state, deviation, span.jumps), touched
