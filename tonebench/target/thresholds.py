"""Every limit of every finding lives here, each with its reason or source.

"Judgement" marks a limit that is ours; "common practice, no source" one of the trade without a publication.
"""

import math

# Stability: the unit circle itself; no judgement in it.
LARGEST_RADIUS = 1.0

# pole-moved. A note over 1 cent (judgement: well under what is heard, worth knowing for a tuned resonance); a caution
# over 5 cents: the difference limen of a pure tone is some 0.2 to 0.3 % at 1 kHz (textbooks, from memory).
POLE_MOVED_NOTE_CENTS = 1.0
POLE_MOVED_CAUTION_CENTS = 5.0

# ring-changed. 5 % is the difference limen of reverberation time (ISO 3382-1 Annex A, from memory); five times that
# is a caution whether or not the ring was asked for (judgement).
RING_CHANGED_PERCENT = 5.0
RING_CHANGED_CAUTION_PERCENT = 25.0

# notch-shallower, notch-missed: level left at the intended frequency. -60 dB: nothing lower is judged audible
# anywhere in this bench; -40 dB: what a hum treatment is held to here; -20 dB: no longer a notch (judgements).
NOTCH_NOTE_DB = -60.0
NOTCH_CAUTION_DB = -40.0
NOTCH_MISSED_DB = -20.0

# response-changed. Compared where the ideal lies above -60 dB of its maximum. 0.1 dB: what a preset's hearing numbers
# are compared with; 0.5 dB: lower end of the difference limen of level (textbooks, from memory); 3 dB: no longer the
# filter that was heard (judgement). Caution and danger count only within 20 dB of the maximum, because the slope of a
# notch turns the smallest move of its zeros into many dB near its bottom, which the notch findings judge.
RESPONSE_FLOOR_DB = -60.0
RESPONSE_WEIGHTY_DB = -20.0
RESPONSE_NOTE_DB = 0.1
RESPONSE_CAUTION_DB = 0.5
RESPONSE_DANGER_DB = 3.0

# gain-high. The bench starts at -20 dB under a ceiling of -6 dB, so a full-scale tone that a chain lifts by 14 dB just
# reaches the ceiling; 30 dB over full scale is what the guard calls a run-away.
GAIN_CAUTION_DB = 14.0
GAIN_DANGER_DB = 30.0

# ring-after-click, ring-after-tone. Decay threshold about 0.2 s above 100 Hz and about 0.85 s at 32 Hz: M. Stephenson,
# "Assessing the quality of low frequency audio reproduction in critical listening spaces", PhD thesis, University of
# Salford 2012, abstract. Straight in log-log between the two, constant outside (judgement).
RING_LOW_HZ = 32.0
RING_LOW_S = 0.85
RING_HIGH_HZ = 100.0
RING_HIGH_S = 0.2
RING_CAUTION_FACTOR = 2.0  # a caution at twice the threshold (judgement)

# near-nyquist. At 75 % of half the sampling rate the bilinear transform's tan(x)/x passes 2: the upper side of the
# analogue curve is squeezed to less than half its width (from the formula; that half matters is a judgement).
NEAR_NYQUIST_PERCENT = 75.0

# series-of-resonators. 20 dB under what each bell was set to is a bank that does not sound as written (judgement).
SERIES_LOSS_DB = 20.0

# overflow-possible. Frames of impulse response that are really summed; beyond, a geometric tail is added.
LARGEST_NORM_FRAMES = 16384


def ring_limit_s(frequency_hz: float) -> float:
    """Return the T60 in seconds above which a ring at this frequency is heard (source above)."""
    if frequency_hz <= RING_LOW_HZ:
        return RING_LOW_S
    if frequency_hz >= RING_HIGH_HZ:
        return RING_HIGH_S
    slope = math.log(RING_HIGH_S / RING_LOW_S) / math.log(RING_HIGH_HZ / RING_LOW_HZ)
    return RING_LOW_S * math.exp(slope * math.log(frequency_hz / RING_LOW_HZ))
