/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The response that a record shows, from averaged spectra. */
#ifndef PW_TWIN_SPECTRUM_H
#define PW_TWIN_SPECTRUM_H

#include "twin/compare.h"
#include "twin/welch.h"

/* Samples of a segment: a power of two that gives 15 half-overlapped segments or more, 64 to 32768;
 * 0 for records of fewer than 512 samples. */
int pw_spectrum_segment(int64_t samples);

/* Points over the band, each the mean over the bins about it. like: the stage that the board is
 * most like, the analog model or a fitted one. With R the spectrum of the twin's output times the
 * ratio of the response of like to the twin's, and Y that of the measured output brought back by
 * the delay, the measured response is that of like times E = sum conj(R) Y / sum conj(R) R. E
 * differs from 1 by what tolerances do only: it hardly changes from bin to bin, and what the window
 * smears is alike in R and Y and leaves it alone.
 * Coherence g2 = |sum conj(R) Y|^2 / (sum |R|^2 sum |Y|^2); the standard error of |E| / |E| and of
 * its angle is sqrt((1 - g2) / (2 n g2)) over n averages (Bendat and Piersol, Random Data, random
 * errors of frequency response estimates); adjacent bins of a Hann window, which
 * correlate by 2/3 and the next ones by 1/6, count as 18 / 35 each.
 * Not excited: where input or twin have no more than 4 times what leakage can explain, where g2 is
 * below the 95 % point of coherence by chance, 1 - 0.05^(1 / (n - 1)), or the band is above 6
 * dB. */
void pw_spectrum_points(const pw_results *results, const pw_roots *like, const pw_welch *welch,
                        double delay, pw_arena *arena, pw_points *out);

#endif
