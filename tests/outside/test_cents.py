"""Cents and volts."""

import pytest

from modgen.formulas.pitch import cents_to_ratio, cents_to_volts, scale_to_cents, volts_to_cents


@pytest.mark.source(
    "from memory: note tables of equal temperament: A4 440 Hz, A#4 466.16 Hz, C5 523.25 Hz, E5 659.26 Hz"
)
@pytest.mark.parametrize(("semitones", "hertz"), [(1, "466.16"), (3, "523.25"), (7, "659.26"), (12, "880.00")])
def test_equal_temperament(printed, semitones, hertz):
    assert 440.0 * cents_to_ratio(100.0 * semitones) == printed(hertz)
    assert volts_to_cents(semitones / 12) == pytest.approx(100.0 * semitones)


@pytest.mark.source(
    "H. Helmholtz, On the Sensations of Tone, transl. Ellis, 2nd ed., 1885, appendix XX: perfect fifth 3:2 is 702 cents"
)
def test_fifth(printed):
    assert cents_to_ratio(702.0) == pytest.approx(1.5, abs=1.5 * 0.5 / 1731)  # half a cent


@pytest.mark.source("Common practice, no source: at 1 V per octave a semitone is 83.3 mV and a cent 0.833 mV")
def test_one_volt_per_octave(printed):
    assert 1e3 * cents_to_volts(100.0) == printed("83.3")
    assert 1e3 * cents_to_volts(1.0) == printed("0.833")
    assert scale_to_cents(1.0) == volts_to_cents(1.0) == 1200.0
