"""Published ratio of signal to noise of the ideal converter, at every usual number of bits."""

from __future__ import annotations

import numpy as np
import pytest
from digitizing import digitized, residual

from frontend_sim.converter import Adc, AnyAdc, OversamplingAdc

POINTS = 16384
CYCLES = 2503
"""Without a common factor with POINTS, so every conversion meets another phase."""
RATE = 48e3


def ratio(adc: AnyAdc, gain: float) -> float:
    """Return the ratio of a full-scale sine to what a coherent record leaves of it [dB].

    The published ratio takes the error as spread evenly over an LSB. The noise of one sine departs
    from that by up to 0.1 dB at 8 bits, so it is averaged over eight offsets within an LSB. The
    sine is 1.5 LSB short of full scale to leave them room; that is added back.
    """
    amplitude, noise = 1.0 - 1.5 * adc.lsb, []
    frequency = adc.rate * CYCLES / POINTS
    for eighth in range(8):
        offset = (eighth / 8.0 - 1.0) * adc.lsb

        def sine(times: np.ndarray, offset: float = offset) -> np.ndarray:
            turns = frequency * times
            return offset + amplitude * np.sin(2.0 * np.pi * (turns - np.floor(turns)))

        made = digitized(adc, sine, POINTS)
        assert not np.any(made.overrange)
        found, left = residual(made.voltage, made.time, frequency)
        assert found == pytest.approx(gain * amplitude, abs=0.1 * adc.lsb)
        noise.append(np.mean(left**2))
    return float(10.0 * np.log10(0.5 * gain**2 / np.mean(noise)))


# Published: 6.0206 N + 1.7609 dB. Source: W. R. Bennett 1948, "Spectra of quantized signals"
# (computed; source from memory).
@pytest.mark.parametrize("bits", range(8, 25))
def test_sampling(bits: int) -> None:
    """8 to 24 bits, within 0.05 dB."""
    adc = Adc(rate=RATE, bits=bits, low=-1.0, high=1.0)
    assert ratio(adc, 1.0) == pytest.approx(6.0206 * bits + 1.7609, abs=0.05)


@pytest.mark.parametrize("bits", [16, 24])
def test_oversampling(bits: int) -> None:
    """The rounding behind an ideal modulator and filter is the same: only the sine is weaker."""
    adc = OversamplingAdc(
        modulator_rate=4 * RATE, order=2, decimation=4, bits=bits, low=-1.0, high=1.0
    )
    gain = float(adc.sinc.amplitude(RATE * CYCLES / POINTS))
    expected = 6.0206 * bits + 1.7609 + 20.0 * np.log10(gain)
    assert ratio(adc, gain) == pytest.approx(expected, abs=0.05)


# Published: averaging n conversions whose noise is white gains 10 log10(n) dB.
# Source: common practice.
def test_averaging_gains_half_a_bit_per_doubling() -> None:
    """256 conversions with 2 LSB of noise at 12 bits, kept in full: 24.08 dB within 0.2 dB."""
    plain = Adc(rate=RATE, bits=12, low=-1.0, high=1.0, input_noise=1e-3)
    averaged = Adc(
        rate=RATE, bits=12, low=-1.0, high=1.0, input_noise=1e-3, averaging={"count": 256}
    )

    def slow(times: np.ndarray) -> np.ndarray:
        return 0.9 * times * RATE / 2000.0

    noise = []
    for adc in (plain, averaged):
        made = digitized(adc, slow, 2000)
        line = np.polynomial.Polynomial.fit(made.time, made.voltage, 1)
        noise.append(np.std(made.voltage - line(made.time)))
    assert 20.0 * np.log10(noise[0] / noise[1]) == pytest.approx(10.0 * np.log10(256), abs=0.2)
