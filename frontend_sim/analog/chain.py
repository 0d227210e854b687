"""Stages in a row become one linear model with an output after every stage."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from frontend_sim.analog.block import Block, Complex, Real
from frontend_sim.analog.noise import NoiseModel, model_of
from frontend_sim.analog.section import Section
from frontend_sim.errors import ModelError
from frontend_sim.quantities import REFERENCE_TEMPERATURE

if TYPE_CHECKING:
    import control

    from frontend_sim.analog.stages.base import Stage


@dataclass(frozen=True, eq=False)
class Chain:
    """The composed continuous model of a chain of n states and p points.

        dx/dt = a x + b u(t),    y_i(t) = c_i x(t - D_i) + d_i u(t - D_i)

    Point 0 is the stimulus itself, point i the output of stage i, the last one the converter's
    pin. Pure delays of linear stages commute with everything else, so each point carries the sum
    of the delays before it and the model itself stays rational.

    Parameters
    ----------
    a : shape (n, n) [1/s]
    b : shape (n,) [1/s]
    c : shape (p, n) [1]
    d : shape (p,) [1]
    delay : shape (p,) [s]
    points : names of the p points
    noise_b : columns of the q noise sources, shape (n, q) [1/s]
    noise_d : their direct way to each point, shape (p, q) [1]
    offset : what the constant sources of the stages (offset voltages, bias currents, references)
        add to each point, shape (p,). They have been on for ever, so each adds its settled value
        and no transient, whether the chain starts settled on the stimulus or at rest. It is not in
        c x + d u: the signal of point i is y_i + offset_i.
    """

    sections: tuple[Section, ...]
    a: Real
    b: Real
    c: Real
    d: Real
    delay: Real
    points: tuple[str, ...]
    noise_b: Real
    noise_d: Real
    offset: Real

    @property
    def order(self) -> int:
        """Number of states."""
        return len(self.b)

    @cached_property
    def poles(self) -> Complex:
        """Poles of all blocks [rad/s], in the order of the chain."""
        found = [block.poles for section in self.sections for block in section.blocks]
        return np.concatenate(found) if found else np.empty(0, dtype=np.complex128)

    def response(self, frequency: Real) -> Complex:
        """Return the transfer function from stimulus to pin at frequencies [Hz], delay included."""
        s = np.asarray(2j * np.pi * np.asarray(frequency), dtype=np.complex128)
        total = np.exp(-s * self.delay[-1])
        for section in self.sections:
            for block in section.blocks:
                total = total * block.response(s)
        return np.asarray(total, dtype=np.complex128)

    def settled(self, value: float) -> Real:
        """Return the states, shape (n,), after the stimulus has rested at a value for ever.

        Raises
        ------
        ModelError
            If a pole at the origin sees a value other than zero: it would have drifted away.
        """
        states = []
        level = value
        for section in self.sections:
            for block in section.blocks:
                x = _rest_of(block, level, section.name)
                level = float(block.c @ x + block.d * level)
                states.append(x)
        return np.concatenate(states) if states else np.empty(0)

    def noise_model(self, lowest: float) -> NoiseModel:
        """Return what the noise sources of all stages do at the pin.

        Parameters
        ----------
        lowest : frequency down to which 1/f noise is made [Hz]
        """
        sources = [
            replace(source, name=f"{part.name}: {source.name}")
            for part in self.sections
            for source in part.noise
        ]
        inputs = [
            (source, self.noise_b[:, j], float(self.noise_d[-1, j]))
            for j, source in enumerate(sources)
        ]
        return model_of(self.a, self.c[-1], inputs, lowest)

    def state_space(self) -> control.StateSpace:
        """Return the chain as a ``control.StateSpace``, from the stimulus to the pin.

        Raises
        ------
        ModelError
            If the chain holds a transport delay, which has no finite state space. Take
            ``without_delay()`` first, or approximate the delay with ``control.pade``.
        """
        import control

        self._refuse_delay()
        return control.StateSpace(self.a, self.b[:, None], self.c[-1:], [[self.d[-1]]])

    def transfer_function(self) -> control.TransferFunction:
        """Return the chain as a ``control.TransferFunction``, from the stimulus to the pin.

        The polynomials are expanded, which loses accuracy for high orders and rates far apart;
        the simulator itself never uses them. Raises ModelError as ``state_space`` does.
        """
        import control

        self._refuse_delay()
        numerator, denominator = np.ones(1), np.ones(1)
        for section in self.sections:
            for block in section.blocks:
                top, bottom = block.polynomials()
                numerator = np.convolve(numerator, top)
                denominator = np.convolve(denominator, bottom)
        return control.TransferFunction(np.trim_zeros(numerator, "f"), denominator)

    def without_delay(self) -> Chain:
        """Return the same chain with every transport delay taken out."""
        return compose([replace(part, delay=0.0) for part in self.sections])

    def _refuse_delay(self) -> None:
        if self.delay[-1] > 0.0:
            raise ModelError(
                f"the chain holds a transport delay of {self.delay[-1]:g} s, which has no finite "
                "state space; take without_delay() first, or approximate it with control.pade"
            )


def _rest_of(block: Block, level: float, name: str) -> Real:
    if block.order == 0:
        return np.empty(0)
    if not block.integrates:
        # From a level of one, so that a high pass passes on exactly nothing of any level.
        return level * block.at_rest
    if level == 0.0:
        return np.zeros(block.order)
    raise ModelError(
        f"stage {name!r} has a pole at the origin and would have drifted away on the settled "
        f"value {level:g} before the run; start the stimulus at zero or set "
        'simulation.initial = "rest"'
    )


def chain_of(stages: Sequence[Stage], temperature: float = REFERENCE_TEMPERATURE) -> Chain:
    """Compose stages, named by their ``name`` or by kind and position.

    Parameters
    ----------
    temperature : of the circuit, for its thermal noise [K]

    Raises
    ------
    ModelError
        If a stage is unstable.
    """
    return compose(
        [
            Section.of(stage, stage.label(position), temperature)
            for position, stage in enumerate(stages, start=1)
        ]
    )


def compose(sections: Sequence[Section]) -> Chain:
    """Put sections in a row, in block lower triangular form, by

        a = [[a1, 0], [b2 c1, a2]],  b = [b1, b2 d1],  c = [d2 c1, c2],  d = d2 d1.

    A noise source is one more input, which enters at its own block. A constant source is one that
    has been on for ever: what it adds to each point is its settled value.

    Raises
    ------
    ModelError
        If a pole at the origin would drift away on a constant source before it.
    """
    n = sum(block.order for part in sections for block in part.blocks)
    q = sum(len(part.noise) for part in sections)
    a, b, noise_b = np.zeros((n, n)), np.zeros(n), np.zeros((n, q))
    c, d, noise_d, delay = np.zeros(n), 1.0, np.zeros(q), 0.0
    rows = [(c.copy(), d, noise_d.copy(), delay, "stimulus")]
    at, source = 0, 0
    for part in sections:
        entry, begin = (c.copy(), d, noise_d.copy()), at
        for number, block in enumerate(part.blocks):
            here = slice(at, at + block.order)
            a[here, :] = block.b[:, None] * c
            a[here, here] = block.a
            b[here] = block.b * d
            noise_b[here] = block.b[:, None] * noise_d
            c, d, noise_d = block.d * c, block.d * d, block.d * noise_d
            c[here] = block.c
            for j, entering in enumerate(part.noise, start=source):
                if entering.block == number:
                    noise_b[here, j] += entering.b
                    noise_d[j] += entering.d
            at += block.order
        source += len(part.noise)
        delay += part.delay
        rows.append((c.copy(), d, noise_d.copy(), delay, part.name))
        for tap in part.taps:
            row = tap.d * entry[0]
            row[begin:at] = tap.c
            rows.append((row, tap.d * entry[1], tap.d * entry[2], delay + tap.delay, tap.name))
    c_rows, d_rows, noise_rows, delays, names = zip(*rows, strict=True)
    return Chain(
        tuple(sections),
        a,
        b,
        np.array(c_rows),
        np.array(d_rows),
        np.array(delays),
        tuple(names),
        noise_b,
        np.array(noise_rows),
        _offsets(sections),
    )


def _offsets(sections: Sequence[Section]) -> Real:
    """Return what the constant sources of all stages add to each point, shape (p,)."""
    level, levels = 0.0, [0.0]
    for part in sections:
        tapped = [0.0] * len(part.taps)
        if level and part.taps:
            rest = _rest_of(part.blocks[0], level, part.name)
            tapped = [float(tap.c @ rest + tap.d * level) for tap in part.taps]
        for block in part.blocks:
            if level == 0.0:
                break
            if block.integrates:
                raise ModelError(
                    f"stage {part.name!r} has a pole at the origin and would drift away on the "
                    f"offset of {level:g} that the stages before it add; give the integrator a "
                    "large but finite time constant, or put a high pass before it"
                )
            level *= float(block.response(np.zeros(1, dtype=np.complex128))[0].real)
        level += part.offset
        levels += [level, *tapped]
    return np.array(levels)
