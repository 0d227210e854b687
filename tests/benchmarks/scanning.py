"""What a scan of 16 channels costs beside 16 runs of one channel with the same conversions.

    python tests/benchmarks/scanning.py [--quick]

Each pair is timed back to back, several times, and the median of the ratios is told. Exit status 1
if a scan costs more than three times as much.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections.abc import Callable
from statistics import median

from frontend_sim.scenario import AnyScenario, parse_scenario
from frontend_sim.simulation import ScanSimulation, Simulation

CHANNELS, RATE, MOST = 16, 10e3, 3.0

FILTER = 'kind = "butterworth"\norder = 4\ncorner = "2 kHz"\n'
DRIVER = 'kind = "rc-lowpass"\nname = "driver"\nresistance = "100 ohm"\ncapacitance = "3 nF"\n'
NETWORK = (
    '[adc.input]\nsource_resistance = "1 kohm"\npin_capacitance = "1 nF"\n'
    'switch_resistance = "100 ohm"\nsampling_capacitance = "10 pF"\nacquisition_time = "2 us"\n'
)
RANDOM = (
    'aperture_jitter = "1 ns"\ninput_noise = "100 uV"\n'
    '[adc.dither]\nshape = "triangular"\nwidth = "2 LSB"\n'
)
KINDS = {
    "channels that know nothing of each other": ("", ""),
    "one sampling capacitor for all channels": ("", NETWORK),
    "jitter, noise and dither": ("", RANDOM),
    "a shared stage behind the multiplexer": (DRIVER, ""),
}


def stimulus(channel: int) -> str:
    """Return the lines of a channel's stimulus."""
    return f'kind = "sine"\namplitude = "1 V"\nfrequency = "{100 + channel} Hz"\n'


def ending(rate: float, adc: str, seconds: float) -> str:
    """Return what scans and single channels have in common."""
    return (
        f"[simulation]\nduration = {seconds}\n"
        f'[adc]\nrate = {rate}\nbits = 16\nlow = "-2 V"\nhigh = "2 V"\n{adc}'
    )


def scan(shared: str, adc: str, seconds: float) -> AnyScenario:
    """Return the scan."""
    text = "".join(
        f'[[channel]]\nname = "c{i}"\n[channel.stimulus]\n{stimulus(i)}[[channel.chain]]\n{FILTER}'
        for i in range(CHANNELS)
    )
    text += f"[[scan.chain]]\n{shared}" if shared else ""
    return parse_scenario(text + ending(CHANNELS * RATE, adc, seconds))


def alone(channel: int, shared: str, adc: str, seconds: float) -> AnyScenario:
    """Return one channel, which has a converter and the shared stage for itself."""
    text = f"[stimulus]\n{stimulus(channel)}[[chain]]\n{FILTER}"
    text += f"[[chain]]\n{shared}" if shared else ""
    return parse_scenario(text + ending(RATE, adc, seconds))


def timed(simulations: Callable[[], list[ScanSimulation | Simulation]]) -> float:
    """Prepare and run, and return the time [s]."""
    start = time.perf_counter()
    for simulation in simulations():
        for _ in simulation.blocks():
            pass
    return time.perf_counter() - start


def main() -> int:
    """Measure everything and print a table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="a tenth of the conversions")
    seconds, runs = (1.0, 3) if parser.parse_args().quick else (10.0, 5)
    worst = 0.0
    for name, (shared, adc) in KINDS.items():
        whole = scan(shared, adc, seconds)
        parts = [alone(i, shared, adc, seconds) for i in range(CHANNELS)]

        def together(whole: AnyScenario = whole) -> list[ScanSimulation | Simulation]:
            return [ScanSimulation(whole)]  # type: ignore[arg-type] # it has channels

        def apart(parts: list[AnyScenario] = parts) -> list[ScanSimulation | Simulation]:
            return [Simulation(part) for part in parts]  # type: ignore[arg-type] # these have none

        timed(together), timed(apart)
        ratio = median(timed(together) / timed(apart) for _ in range(runs))
        worst = max(worst, ratio)
        print(f"{ratio:6.2f}  <= {MOST:g}  {'met' if ratio <= MOST else 'MISSED':6}  {name}")
    return 0 if worst <= MOST else 1


if __name__ == "__main__":
    sys.exit(main())
