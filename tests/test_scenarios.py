"""Every example scenario runs, gives its pinned codes, and agrees with a closed form."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from frontend_sim.scenario import load_scenario
from frontend_sim.simulation import simulate

ROOT = Path(__file__).resolve().parents[1] / "scenarios"
Real = NDArray[np.float64]

# Number of codes, the code in the middle, the last code, the sum of all codes.
PINNED: dict[str, tuple[int, int, int, int]] = {
    "checks/acquisition": (10000, 32767, 32734, 327680021),
    "checks/alias-attenuation": (250, 3074, 942, 516842),
    "checks/alias-error": (1000, 7580, 6937, 8192956),
    "checks/clipping": (1000, 2072, 1802, 2048028),
    "checks/corner": (250, 2808, 1171, 514460),
    "checks/delay": (250, 3103, 3103, 592949),
    "checks/dnl": (100000, 301, 877, 51193436),
    "checks/droop": (400, 3268, 2022, 1060673),
    "checks/effective-bits": (2048, 2048, 1811, 4194304),
    "checks/grid-error": (250, 2301, 1568, 512421),
    "checks/headroom": (1000, 2072, 1802, 2048028),
    "checks/inl": (52000, 512, 1023, 26636882),
    "checks/latency": (76, 52429, 52429, 2972170),
    "checks/level": (250, 3724, 3724, 924759),
    "checks/mains-level": (2000, 19849, 19859, 39720229),
    "checks/noise": (250, 47663, 47663, 9863192),
    "checks/noise-free-bits": (250, 47663, 47663, 9863192),
    "checks/overshoot": (250, 2979, 2979, 607008),
    "checks/recovery": (400, 1873, 1836, 848467),
    "checks/rejection": (500, 19859, 19859, 9084478),
    "checks/rise-time": (250, 3103, 3103, 603485),
    "checks/settling": (250, 2979, 2979, 616443),
    "checks/sfdr": (2048, 2048, 1811, 4194304),
    "checks/sinad": (2048, 2048, 1811, 4194304),
    "checks/snr": (2048, 2048, 1811, 4194304),
    "checks/thd": (2048, 2048, 1811, 4194304),
    "checks/total-error": (1000, 1961, 1945, 1979893),
    "checks/undershoot": (100, 3722, 3724, 300073),
    "converter/averaging": (200, 5014, 5064, 1002894),
    "converter/bow": (1000, 32762, 65470, 32731232),
    "converter/capacitor-mismatch": (21000, 515, 1023, 10812993),
    "converter/clock": (2001, 29815, 26848, 65566087),
    "converter/code-table": (2000, 34, 63, 68610),
    "converter/dither": (2000, 512, 512, 1024186),
    "converter/input-network": (500, 4531, 4531, 4107915),
    "converter/oversampling": (58, 10133439, 10133441, 580087373),
    "converter/ratiometric": (120, 31416, 31431, 3769172),
    "converter/reference": (1000, 209324, 209324, 209322530),
    "converter/restarted": (40, 258231, 724858, 20930476),
    "critically_damped_pair": (100, 3474, 3475, 311035),
    "ecg_through_anti_alias": (75000, 16, -54, 9194),
    "ecg_with_switching_noise": (15000, -50, 253, -661249),
    "first_order_high_pass": (120, 2131, 2052, 273669),
    "first_order_low_pass": (16, 3722, 3724, 53688),
    "high_pass_gain_two": (120, 2164, 2054, 284836),
    "parts_in_the_heat": (100, 3181, 3277, 232647),
    "solve/input-filter": (250, 3724, 3724, 770628),
    "solve/lowest-rate": (500, 3836, 3381, 4108497),
    "overloaded_multiple_feedback": (200, 2184, 2159, 354113),
    "saturated_photodiode_amplifier": (200, 173, 1, 190778),
    "slewing_sallen_key": (200, 539, 539, 120861),
    "stages/ac-coupled-source": (200, 1941, 2040, 402430),
    "stages/accelerometer": (200, 2049, 2048, 414815),
    "stages/bessel": (200, 2867, 2867, 551103),
    "stages/buffer": (200, 2039, 1786, 409368),
    "stages/butterworth": (200, 2361, 2120, 407042),
    "stages/chebyshev": (200, 2027, 1789, 407169),
    "stages/clamp": (1000, 34, 0, 845088),
    "stages/current-shunt": (200, 1638, 1638, 450481),
    "stages/difference-amplifier": (200, 2904, 2904, 563590),
    "stages/gain": (200, 2048, 1543, 409600),
    "stages/inverting-amplifier": (200, 2097, 2601, 409551),
    "stages/ladder": (200, 2724, 2724, 527198),
    "stages/multiple-feedback": (200, 2129, 2392, 412057),
    "stages/noninverting-amplifier": (200, 2015, 1511, 409633),
    "stages/photodiode": (200, 361, 2703, 302907),
    "stages/poles-zeros": (200, 2458, 2458, 488986),
    "stages/polynomial": (200, 2867, 2867, 554322),
    "stages/potentiometer": (200, 2399, 204, 259113),
    "stages/rail-limit": (400, 898, 1052, 840520),
    "stages/rc-highpass": (200, 2063, 2048, 426390),
    "stages/rc-lowpass": (200, 2867, 2867, 548923),
    "stages/resistive-bridge": (200, 2458, 328, 235980),
    "stages/rtd": (200, 2142, 2760, 426396),
    "stages/sallen-key": (200, 2867, 2867, 553324),
    "stages/second-order": (200, 2867, 2867, 552888),
    "stages/slew-limit": (200, 13107, 13107, 2090131),
    "stages/thermal-lag": (200, 3141, 3211, 609386),
    "stages/thermistor": (200, 2249, 950, 454734),
    "stages/thermocouple": (200, 1698, 3361, 337673),
    "stages/transimpedance-amplifier": (200, 3686, 3686, 702798),
    "stages/transport-delay": (200, 2867, 2867, 536545),
    "stages/twin-t-notch": (200, 2120, 1987, 420015),
    "stimuli/chirp": (1200, 5728, 8192, 10017022),
    "stimuli/double-exponential": (40, 8193, 8192, 337191),
    "stimuli/half-sine": (600, 10122, 8192, 5833068),
    "stimuli/noise-burst": (1000, 8181, 8192, 8191678),
    "stimuli/pulse": (400, 8192, 8192, 3931475),
    "stimuli/ramp": (400, 10127, 11469, 3660602),
    "stimuli/recording": (2000, 8190, 6752, 15885254),
    "stimuli/sine": (400, 5936, 7887, 3564871),
    "stimuli/step": (100, 14090, 14090, 1341017),
    "stimuli/sum": (800, 11438, 11439, 7859675),
    "stimuli/tones": (1000, 6065, 6648, 8606678),
    "underdamped_section": (200, 2049, 2048, 384831),
    "well_pump_valve_slam": (2500, 1174, 979, 2912010),
}


SCANS: dict[str, dict[str, tuple[int, int, int, int]]] = {
    "scan/charge_memory": {
        "battery": (100, 13513, 13513, 1351300),
        "ground": (100, 141, 141, 14100),
    },
    "scan/sequential": {
        "pressure": (95, 1560, 1369, 141546),
        "flow": (48, 2482, 2482, 96536),
        "level": (47, 373, 733, 17545),
    },
    "scan/shared_amplifier": {
        "north": (2500, 15731, 15703, 39325832),
        "east": (2500, 47183, 47183, 106163085),
        "south": (2500, 20974, 20974, 52434000),
        "west": (2500, 36696, 31458, 91744882),
    },
    "scan/simultaneous": {
        "phase a": (1000, 2048, 1877, 2047991),
        "phase b": (1000, 3230, 3307, 2048002),
    },
}
"""Scan -> channel -> the same four numbers."""


def _low_pass(t: Real) -> Real:
    return -3.0 * np.expm1(-t / 1e-3)


def _decay(height: float) -> Callable[[Real], Real]:
    return lambda t: np.where(t >= 2e-3, height * np.exp(-(t - 2e-3) / 10e-3), 0.0)


def _critically_damped(t: Real) -> Real:
    # g (1 - exp(-t/T) (1 + t/T)), any control textbook, e.g. Ogata, from memory.
    return 4.0 * 0.7 * (1.0 - np.exp(-t / 1e-4) * (1.0 + t / 1e-4))


def _underdamped(t: Real) -> Real:
    # Damping ratio 1/(2 Q) = 0.25; Ogata, from memory.
    w, z = 2.0 * np.pi * 500.0, 0.25
    s = np.maximum(t - 1e-3, 0.0)
    root = np.sqrt(1.0 - z * z)
    return 1.0 - np.exp(-z * w * s) * (np.cos(w * root * s) + z / root * np.sin(w * root * s))


CLOSED_FORMS: dict[str, Callable[[Real], Real]] = {
    "first_order_low_pass": _low_pass,
    "first_order_high_pass": _decay(1.0),
    "high_pass_gain_two": _decay(1.4),
    "critically_damped_pair": _critically_damped,
    "underdamped_section": _underdamped,
}


@pytest.mark.parametrize("name", PINNED)
def test_example_gives_its_pinned_codes(name: str) -> None:
    """The codes of an example change only when somebody means them to."""
    run = simulate(load_scenario(ROOT / f"{name}.toml"))
    count, middle, last, total = PINNED[name]
    assert len(run.codes) == count
    assert run.codes[count // 2] == middle
    assert run.codes[-1] == last
    # A voltage on the very edge of a code may fall to either side on another processor.
    assert abs(int(run.codes.sum()) - total) <= 3


@pytest.mark.parametrize("name", CLOSED_FORMS)
def test_example_agrees_with_its_closed_form(name: str) -> None:
    """At every conversion within 1e-9 of the full scale of the response."""
    run = simulate(load_scenario(ROOT / f"{name}.toml"))
    np.testing.assert_allclose(run.pin, CLOSED_FORMS[name](run.time), rtol=0, atol=1e-9)


@pytest.mark.parametrize("name", SCANS)
def test_scan_gives_its_pinned_codes(name: str) -> None:
    """The same for every channel of a scan."""
    run = simulate(load_scenario(ROOT / f"{name}.toml"))
    assert set(run.channels) == set(SCANS[name])
    for channel, (count, middle, last, total) in SCANS[name].items():
        codes = run.channels[channel].codes
        assert len(codes) == count
        assert codes[count // 2] == middle
        assert codes[-1] == last
        assert abs(int(codes.sum()) - total) <= 3


def test_every_example_is_pinned() -> None:
    """No scenario stands in the folder without a number here."""
    files = {str(file.relative_to(ROOT))[:-5] for file in ROOT.rglob("*.toml")}
    # Sets are pinned in tests/replay/test_examples.py.
    assert {file for file in files if not file.startswith("sets/")} == {*PINNED, *SCANS}


def test_every_example_says_that_it_is_invented() -> None:
    """Settings are invented and the files say so."""
    for file in ROOT.rglob("*.toml"):
        head = file.read_text().split("format", 1)[0]
        assert "nvented" in head, file
