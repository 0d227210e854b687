"""Where a converter's input network meets the last stage of a scenario's chain."""

from __future__ import annotations

from frontend_sim.analog.port import OutputImpedance, Port
from frontend_sim.converter.adc import Adc
from frontend_sim.converter.input_network import InputNetwork
from frontend_sim.scenario.circuit import stages_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.spread import moved


def input_network_of(scenario: Scenario) -> tuple[Adc, InputNetwork] | None:
    """Return the converter and its input network at the circuit's temperature; None without one.

    Raises
    ------
    ModelError
        If a drift takes a part to a value that it cannot have.
    """
    adc = scenario.adc
    if not isinstance(adc, Adc) or adc.input is None:
        return None
    return adc, moved(adc.input, scenario.environment.temperature, "adc.input")


def discretization_fault(scenario: Scenario) -> str | None:
    """Return what is wrong about a discrete model before an input network, if it is one."""
    method = scenario.simulation.discretization
    if method == "exact" or input_network_of(scenario) is None:
        return None
    return (
        f'simulation.discretization = "{method}" steps over the switch of adc.input; set it to '
        '"exact", or take [adc.input] out'
    )


def input_port(scenario: Scenario, values: InputNetwork) -> Port:
    """Return the output of the last stage with what stands between it and the switch.

    Raises
    ------
    ModelError
        If the stage's output impedance grows without bound with frequency, or the stage is
        unstable with the pin's capacitance.
    """
    stages = stages_of(scenario)
    impedance = OutputImpedance.of(stages[-1].output_circuit() if stages else None)
    return Port.of(impedance, values.source_resistance, values.pin_capacitance)


def ideal_source_notes(scenario: Scenario, values: InputNetwork) -> tuple[str, ...]:
    """Return a note where a stage counts as a source without any resistance."""
    stages = stages_of(scenario)
    if not stages or stages[-1].output_circuit() is not None or values.source_resistance > 0.0:
        return ()
    return (
        f"stage {stages[-1].label(len(stages))!r} counts as a source without resistance for the "
        "converter's input network; what it has belongs into adc.input.source_resistance",
    )
