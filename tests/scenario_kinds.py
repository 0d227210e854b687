"""One right table for every kind of stimulus and stage, as a scenario file has them."""

from __future__ import annotations

from typing import Any

STIMULUS_SAMPLES: list[dict[str, Any]] = [
    {"kind": "step", "after": "1 V", "at": "1 ms"},
    {"kind": "ramp", "slope": "1 V/ms", "length": "1 s"},
    {"kind": "sine", "amplitude": "1 V", "frequency": "1 kHz", "phase": "90 deg"},
    {
        "kind": "tones",
        "tone": [
            {"amplitude": 1, "frequency": 10},
            {"amplitude": "10 mV", "frequency": "1 kHz", "phase": "1 rad"},
        ],
    },
    {
        "kind": "chirp",
        "amplitude": 1,
        "start_frequency": 1,
        "stop_frequency": 10,
        "length": 1,
        "sweep": "logarithmic",
    },
    {"kind": "pulse", "high": 1, "width": 1, "period": 3, "count": 2},
    {"kind": "half-sine", "peak": 1, "length": "11 ms"},
    {"kind": "double-exponential", "peak": 1, "front_time": "1.2 us", "half_time": "50 us"},
    {"kind": "noise-burst", "rms": "1 mV", "bandwidth": "1 kHz", "length": 1},
    {
        "kind": "sum",
        "term": [
            {"kind": "step", "after": 1},
            {"kind": "sum", "term": [{"kind": "sine", "amplitude": 1, "frequency": 1}]},
        ],
    },
    {"kind": "recording", "file": "/folder/signal.csv", "time": "t", "column": 2, "unit": "mV"},
]

STAGE_SAMPLES: list[dict[str, Any]] = [
    {"kind": "rc-lowpass", "name": "a", "resistance": "4k7", "capacitance": "4n7"},
    {"kind": "rc-highpass", "resistance": 1e3, "capacitance": 1e-9},
    {"kind": "gain", "gain": "6 dB"},
    {"kind": "noninverting-amplifier", "gain": 2, "gain_bandwidth": 1e6},
    {"kind": "inverting-amplifier", "feedback_resistance": 1, "input_resistance": 2},
    {"kind": "second-order", "corner": 10, "quality_factor": 2},
    {"kind": "butterworth", "order": 4, "corner": 100},
    {"kind": "bessel", "order": 3, "corner": 100, "response": "high-pass"},
    {
        "kind": "chebyshev",
        "order": 3,
        "response": "band-pass",
        "lower_corner": 10,
        "upper_corner": 20,
        "ripple": "1 dB",
    },
    {"kind": "poles-zeros", "poles": [-1, [-2, 3], [-2, -3]], "zeros": [0], "gain": 3},
    {"kind": "polynomial", "numerator": [1], "denominator": [1, 2, 3, 1]},
    {"kind": "transport-delay", "delay": "1 ms"},
    {"kind": "thermal-lag", "time_constant": {"value": "2 s", "tolerance": "20 %"}},
    {
        "kind": "rtd",
        "wiring": "three-wire",
        "lead_resistance": {"value": "2 ohm", "drift": "0.39 %/K"},
        "lead_mismatch": "50 mohm",
        "excitation_current": "1 mA",
        "operating_temperature": "50 degC",
    },
    {
        "kind": "thermistor",
        "nominal_resistance": "10kJ",
        "beta": {"value": "3950 K", "tolerance": "1 %"},
        "excitation_voltage": "3 V",
        "series_resistance": {"value": "10 kohm", "series": "E24"},
        "place": "to-excitation",
    },
    {"kind": "thermocouple", "type": "K", "cold_junction": "30 degC", "resistance": 10},
    {
        "kind": "accelerometer",
        "sensitivity": "100 mV/g",
        "natural_frequency": "2 kHz",
        "quality_factor": 5,
        "noise_density": "100 ug/sqrt(Hz)",
    },
    {
        "kind": "resistive-bridge",
        "sensitivity": "2 mV/V",
        "full_scale": "500 N",
        "excitation": "5 V",
        "zero_balance": "0.1 mV/V",
        "ratiometric": True,
    },
    {
        "kind": "potentiometer",
        "resistance": "10kM",
        "excitation_voltage": 3.3,
        "wiper_resistance": "100 ohm",
        "load_capacitance": "10 nF",
        "operating_position": "30 %",
    },
    {"kind": "photodiode", "responsivity": "0.6 A/W", "load_resistance": "1 Mohm"},
    {"kind": "current-shunt", "resistance": "10 mohm"},
    {"kind": "ac-coupled-source", "capacitance": "1 uF", "load_resistance": "47kF"},
]
