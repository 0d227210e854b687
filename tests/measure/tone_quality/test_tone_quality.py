"""SNR, SINAD, THD, SFDR and effective bits against closed forms, and the refusals."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sines import converted, full_scale_sine, sine

from frontend_sim.errors import MeasureError
from frontend_sim.measure.level import jitter_limit, quantization_limit
from frontend_sim.measure.sine_fit import fit_sine
from frontend_sim.measure.spectrum import WINDOWS
from frontend_sim.measure.tone_quality import tone_quality

COUNT = 2**16
RATE = float(COUNT)


@pytest.mark.parametrize(
    ("bits", "limit"), [(8, 49.926), (12, 74.008), (16, 98.091), (24, 146.255)]
)
def test_the_ideal_quantizer(bits, limit):
    """Its error is LSB / sqrt(12), so a full-scale sine has 6.0206 N + 1.7609 dB, within 0.05 dB.

    Coherent records, 2503 cycles in 65 536 points. Averaged over eight offsets within an LSB, since
    the error of one sine of 8 bits strays by 0.1 dB with where its tops lie between two codes; the
    half LSB that the sine must stay below each end is put right. Source: W. R. Bennett 1948 (from
    memory), numbers from the list of published values.
    """
    errors = []
    for shift in np.arange(8) / 8.0:
        values = converted(bits, full_scale_sine(bits, 2503, COUNT, shift))
        found = tone_quality(values, RATE, full_scale=2.0)
        assert found.window == "rectangular"
        assert found.coherence.cycles == 2503
        errors.append(found.error_rms)
    error = math.sqrt(np.mean(np.square(errors)))
    assert -20.0 * math.log10(math.sqrt(2.0) * error) == pytest.approx(limit, abs=0.05)
    assert quantization_limit(bits) == pytest.approx(limit, abs=5e-4)


@pytest.mark.parametrize("bits", [8, 12, 16])
def test_one_sine_against_its_own_quantization_error(bits):
    """On a coherent record SINAD, found in bins, is that of the error summed sample by sample."""
    clean = full_scale_sine(bits, 2503, COUNT, 0.3)
    values = converted(bits, clean)
    found = tone_quality(values, RATE)
    fit = fit_sine(values, rate=RATE)
    assert found.sinad == pytest.approx(fit.sinad, abs=0.002)
    error = values - clean
    # The offset and the part in phase with the sine are no error of the definition.
    assert found.error_rms == pytest.approx(np.std(error), rel=3e-4)


@pytest.mark.parametrize("deviation", [0.0, 0.2, 0.5])
@pytest.mark.parametrize("bits", [8, 12, 16])
def test_spectrum_and_fit_agree(bits, deviation):
    """SINAD and effective bits by spectrum and by fit agree within 0.1 dB, on and off a bin."""
    values = converted(bits, full_scale_sine(bits, 2503 + deviation, COUNT))
    found = tone_quality(values, RATE, full_scale=2.0)
    fit = fit_sine(values, rate=RATE)
    assert found.sinad == pytest.approx(fit.sinad, abs=0.1)
    assert found.effective_bits == pytest.approx(fit.effective_bits(2.0), abs=0.1 / 6.0206)
    assert found.amplitude == pytest.approx(fit.amplitude, rel=1e-4)
    assert found.offset == fit.offset
    assert found.frequency == fit.frequency


@pytest.mark.parametrize("window", WINDOWS)
def test_known_noise_and_harmonics(window):
    """A sine of 1 V with harmonics of 1 and 0.5 mV in white noise of 0.2 mV gives these numbers.

    Noise over 32 768 bins is known to 0.4 %, 0.03 dB; four times that is allowed. A harmonic of
    1 mV in noise of 0.2 mV over 32 768 bins, some of them in its own, is known to 1 %.
    """
    rng = np.random.default_rng(11)
    values = sine(3001, COUNT, offset=-0.4) + 2e-4 * rng.standard_normal(COUNT)
    values += 1e-3 * sine(3 * 3001, COUNT, phase=1.0) + 5e-4 * sine(2 * 3001, COUNT)
    found = tone_quality(values, RATE, window=window, full_scale=4.0)
    noise, harmonics = 2e-4, math.hypot(1e-3, 5e-4)
    assert found.snr == pytest.approx(-20 * math.log10(noise * math.sqrt(2.0)), abs=0.12)
    error = math.hypot(noise, harmonics / math.sqrt(2.0))
    assert found.sinad == pytest.approx(-20 * math.log10(error * math.sqrt(2.0)), abs=0.12)
    assert found.thd == pytest.approx(20 * math.log10(harmonics), abs=0.12)
    assert found.sfdr == pytest.approx(60.0, abs=0.12)
    assert found.spur_frequency == pytest.approx(9003.0, abs=1e-6)
    assert found.effective_bits == pytest.approx(math.log2(4.0 / (12**0.5 * error)), abs=0.02)
    assert found.level == pytest.approx(-6.0206, abs=0.001)
    assert found.offset == pytest.approx(-0.4, abs=1e-5)
    assert found.noise_density == pytest.approx(noise * math.sqrt(2.0 / RATE), rel=0.015)
    assert [each.order for each in found.harmonics] == list(range(2, 11))
    assert found.harmonics[1].amplitude == pytest.approx(1e-3, rel=0.01)


def test_folded_harmonics():
    """Harmonics above half the rate are looked for where they fold, and found there.

    A cubic curve y = x + 0.004 x³ gives the third harmonic 0.001 and adds 0.003 to the tone.
    """
    x = sine(20011, COUNT, phase=0.0)
    found = tone_quality(x + 0.004 * x**3, RATE)
    third = found.harmonics[1]
    assert third.frequency == pytest.approx(COUNT - 3 * 20011, abs=1e-6)
    assert third.amplitude == pytest.approx(0.001, rel=1e-9)
    assert found.amplitude == pytest.approx(1.003, rel=1e-9)
    assert found.thd == pytest.approx(20.0 * math.log10(0.001 / 1.003), abs=1e-6)


def test_hidden_harmonics_are_told():
    """At a quarter of the rate harmonics 3 and 5 fold onto the tone, harmonic 4 to zero."""
    rng = np.random.default_rng(3)
    found = tone_quality(
        sine(COUNT // 4, COUNT) + 1e-3 * rng.standard_normal(COUNT), RATE, harmonics=6
    )
    assert found.hidden == (3, 4, 5, 6)
    assert [each.amplitude is None for each in found.harmonics] == [False, True, True, True, True]


@pytest.mark.parametrize(("frequency", "limit"), [(100e6, 84.04), (1e9, 64.04)])
def test_jitter(frequency, limit):
    """100 fs of jitter leave a sine of 100 MHz 84.04 dB, of 1 GHz 64.04 dB: -20 lg(2 pi f s).

    Closed form, numbers from the list of published values. The noise of 32 768 bins is known to
    0.03 dB.
    """
    rng = np.random.default_rng(6)
    rate, cycles = 2.6e9, round(frequency / 2.6e9 * COUNT) | 1
    exact = cycles / COUNT * rate
    clean = 2.0 * np.pi * (np.arange(COUNT) * cycles % COUNT) / COUNT
    values = np.sin(clean + 2.0 * np.pi * exact * 100e-15 * rng.standard_normal(COUNT))
    found = tone_quality(values, rate)
    assert found.snr == pytest.approx(jitter_limit(exact, 100e-15), abs=0.1)
    assert jitter_limit(frequency, 100e-15) == pytest.approx(limit, abs=0.005)


@settings(max_examples=25, deadline=None)
@given(scale=st.floats(1e-6, 1e6), shift=st.integers(0, 4095), move=st.floats(-5.0, 5.0))
def test_ratios_do_not_depend_on_scale_offset_or_start(scale, shift, move):
    """Ratios stay the same if a coherent record is scaled, moved, or begins elsewhere."""
    rng = np.random.default_rng(1)
    values = sine(307, 4096) + 1e-3 * rng.standard_normal(4096)
    first = tone_quality(values, 1.0)
    moved = tone_quality(scale * (np.roll(values, shift) + move), 1.0)
    for name in ("snr", "sinad", "thd", "sfdr"):
        assert getattr(moved, name) == pytest.approx(getattr(first, name), abs=1e-5), name
    assert moved.amplitude == pytest.approx(scale * first.amplitude, rel=1e-7)


def test_a_tone_between_bins_needs_a_quiet_window():
    """Unasked, the sharpest window that leaks little enough is taken: it depends on the noise.

    Halfway between two bins 1 - sinc²(1/2) of the power leaks, -2.3 dB.
    """
    rng = np.random.default_rng(2)
    clean, noise = sine(1000.5, COUNT), rng.standard_normal(COUNT)
    taken = [tone_quality(clean + s * noise, RATE).window for s in (0.15, 1e-3, 1e-7)]
    assert taken == ["hann", "blackman-harris", "blackman-harris-7"]
    with pytest.raises(MeasureError, match=r"rectangular: the tone leaks -2\.3 dB, .*\nmake the"):
        tone_quality(clean + 1e-3 * noise, RATE, window="rectangular")


@pytest.mark.parametrize("count", [4095, 4096])
def test_a_tone_beside_half_the_rate_is_refused(count):
    """Main lobe and mirror image overlap there, by an odd count of points as by an even one.

    An amplitude of 1.05 of a tone of 1 would be the least that comes of it.
    """
    turns = 0.4996 * np.arange(count)
    noisy = np.sin(2.0 * np.pi * turns + 0.3)
    noisy += 1e-3 * np.random.default_rng(1).standard_normal(count)
    with pytest.raises(MeasureError, match="no window tells the tone") as caught:
        tone_quality(noisy, 1.0)
    assert "blackman-harris: a tone of 0.4996 Hz" in str(caught.value)
    with pytest.raises(MeasureError, match="main lobe of the blackman-harris window"):
        tone_quality(noisy, 1.0, window="blackman-harris")


@pytest.mark.parametrize("count", [4095, 4096])
def test_a_tone_above_half_the_rate_is_measured_where_it_folds_to(count):
    """The guess may be what the generator was set to: 1313.7 Hz at 1 kHz shows up at 313.7 Hz."""
    tone = sine(1.3137 * count, count)
    tone += 1e-3 * np.random.default_rng(2).standard_normal(count)
    found = tone_quality(tone, 1e3, frequency=1313.7)
    assert found.frequency == pytest.approx(313.7, abs=1e-3)
    assert found.amplitude == pytest.approx(1.0, abs=1e-3)
    assert found.snr == pytest.approx(20.0 * math.log10(1e3 / math.sqrt(2.0)), abs=0.3)


def test_no_window_is_quiet_enough():
    """Without a coherent window the measure refuses, lists what leaks, and names the remedies."""
    with pytest.raises(MeasureError) as caught:
        tone_quality(converted(24, full_scale_sine(24, 10.5, 1024)), 1024.0)
    message = str(caught.value)
    for name in ("rectangular", "hann", "blackman-harris", "blackman-harris-7"):
        assert f"  {name}: " in message
    assert "10 cycles +0.5 in the record" in message
    assert "coherent_tone" in message
    assert "fit_sine" in message


def test_a_clipped_tone_has_its_distortion():
    """What a fit refuses, the spectrum measures: a symmetric clip at 0.9 has known harmonics.

    Third harmonic of a sine clipped at r = sin(a): (2/pi) (sin(2a)/2 - ... ) by quadrature.
    """
    turn = 2.0 * np.pi * (np.arange(200_000) + 0.5) / 200_000
    third = 2.0 * np.mean(np.clip(np.sin(turn), -0.9, 0.9) * np.sin(3.0 * turn))
    first = 2.0 * np.mean(np.clip(np.sin(turn), -0.9, 0.9) * np.sin(turn))
    found = tone_quality(np.clip(sine(1009, COUNT), -0.9, 0.9), RATE)
    assert found.harmonics[1].amplitude == pytest.approx(abs(third), rel=1e-3)
    assert found.amplitude == pytest.approx(first, rel=1e-5)


@pytest.mark.parametrize(
    ("values", "keys", "message"),
    [
        (sine(4, 12), {}, "12 samples, this measure needs at least 16"),
        (np.zeros(100), {}, "all samples are equal"),
        (np.random.default_rng(0).standard_normal(4096), {}, "no sine stands out"),
        (sine(32, 1024), {}, "repeats the same 32 samples .* shows 32 phases"),
        (np.tile(sine(3, 32, phase=0.3), 64), {}, "repeats the same 32 samples over and over"),
        (sine(3, 1024), {"window": "flat-top"}, "lies within the main lobe of the flat-top"),
        (sine(5, 32), {"harmonics": 14}, "leaves .* bins for the noise beside the tone and 13"),
        (sine(17, 256), {"window": "hamming"}, "there is no window 'hamming'"),
        (sine(17, 256), {"harmonics": 0}, "highest harmonic must be a number from 1 up"),
        (sine(17, 256), {"full_scale": -1.0}, "the full scale must be a number above zero"),
    ],
)
def test_refusals(values, keys, message):
    """What the record cannot answer is told with the reason and the remedy."""
    with pytest.raises(MeasureError, match=message):
        tone_quality(values, 1000.0, **keys)
