/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Zero-input limit cycles and dead bands. */
#ifndef PW_WORDS_CYCLES_H
#define PW_WORDS_CYCLES_H

#include "words/proof.h"

/* Fills r->limit_cycle; nodes must be proved. */
void pw_cycles_find(pw_proof *proof, pw_realisation *r);

#endif
