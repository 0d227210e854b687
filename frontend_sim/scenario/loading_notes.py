"""What the resistance of a stage would do to the amplifier behind it, which counts as buffered."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import pairwise

from frontend_sim.analog.loading import passes_rest
from frontend_sim.analog.network import SIGNAL, Circuit, Held, Injected, Resistor, solve
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.operational_amplifier import is_input_current
from frontend_sim.errors import ModelError
from frontend_sim.quantities import CURRENT, RESISTANCE, VOLTAGE, as_text
from frontend_sim.scenario.amplifier_notes import KEY

NOTICEABLE = 1e-4
"""A change by a smaller share is none, beside the tolerances of parts."""


def loading_notes(stages: Sequence[Stage]) -> Iterator[str]:
    """Return notes on amplifiers whose own resistors load what stands before them.

    For each the circuit is solved a second time, with the resistance of the stage before between
    source and input. An amplifier that takes a ``source_resistance`` loads nothing, see
    ``amplifier_notes``.

    Parameters
    ----------
    stages : of a chain, with the values that they have at its temperature
    """
    labelled = [(stage.label(position), stage) for position, stage in enumerate(stages, start=1)]
    for (before, source), (label, stage) in pairwise(labelled):
        resistance = source.resistance_at_rest()
        if not isinstance(stage, AmplifierStage) or KEY in type(stage).model_fields:
            continue
        told = list(_changes(stage, resistance, passes_rest(source))) if resistance else []
        if told:
            ohms = as_text(resistance or 0.0, RESISTANCE, 4)
            yield (
                f"{label!r} stands behind {before!r}, whose resistance of {ohms} is not in its "
                f"circuit: with it {' and '.join(told)}; {_cure(stage, ohms)}put a buffer between "
                "them"
            )


def _changes(stage: AmplifierStage, resistance: float, passes: bool) -> Iterator[str]:
    """Tell what a resistance in series with the source changes at rest."""
    alone = stage.solution().levels
    try:
        behind = solve(_behind(stage.circuit(), resistance)).levels
    except ModelError as error:  # positive feedback that it was enough to keep at bay
        yield str(error)
        return
    gain, other = alone[SIGNAL], behind[SIGNAL]
    if passes and gain and other and abs(other - gain) > NOTICEABLE * abs(gain):
        yield f"its gain at rest is {other:.5g} instead of {gain:.5g}"
    injected = (part for part in stage.circuit().parts if isinstance(part, Injected))
    currents = {part.source for part in injected if is_input_current(part)}
    sizes = [(behind[name] or 0.0) - (alone[name] or 0.0) for name in sorted(currents)]
    moved, most = abs(sum(sizes)), max(map(abs, sizes), default=0.0)
    if stage.bias_current != 0.0 and moved > NOTICEABLE * resistance:
        current = as_text(stage.bias_current, CURRENT, 3)
        voltage = as_text(abs(stage.bias_current) * moved, VOLTAGE, 3)
        yield f"its bias current of {current} adds {voltage} to its output"
    if stage.current_noise > 0.0 and most > NOTICEABLE * resistance:
        # Densities have a unit that takes no prefix by itself.
        voltage = as_text(stage.current_noise * most, VOLTAGE, 3)
        yield f"its current noise adds up to {voltage}/sqrt(Hz) there"


def _behind(circuit: Circuit, resistance: float) -> Circuit:
    """Return a circuit with a resistance in series with its source, shared by all its nodes."""
    nodes = _source_nodes(circuit)
    moved = [
        replace(part, node=f"{part.node} alone")
        if isinstance(part, Held) and part.node in nodes
        else part
        for part in circuit.parts
    ]
    share = resistance / max(len(nodes), 1)
    series = [Resistor(f"before {node}", f"{node} alone", node, share) for node in nodes]
    return Circuit((*moved, *series), circuit.output)


def _source_nodes(circuit: Circuit) -> tuple[str, ...]:
    held = (part for part in circuit.parts if isinstance(part, Held) and part.source == SIGNAL)
    return tuple(dict.fromkeys(part.node for part in held))


def _cure(stage: AmplifierStage, ohms: str) -> str:
    """Tell which resistor of the stage the resistance may be counted in, where there is one."""
    circuit = stage.circuit()
    nodes = _source_nodes(circuit)
    joined = [
        part
        for part in circuit.parts
        if {getattr(part, "first", None), getattr(part, "second", None)} & set(nodes)
    ]
    if len(nodes) == len(joined) == 1 and isinstance(joined[0], Resistor):
        return f"add {ohms} to its {joined[0].name}, or "
    return ""
