/* SPDX-License-Identifier: GPL-3.0-or-later */
/* isa.h: which instruction set's copy of the kernels is in force. */
#ifndef TERRACE_ISA_H
#define TERRACE_ISA_H

#include "base/status.h"

enum isa { ISA_SSE2, ISA_AVX2, ISA_COUNT };

/* The widest set this CPU has, or the one that the environment's TERRACE_ISA (sse2, avx2) names
 * when the CPU has it. Results never depend on it. */
enum isa isa_in_force(void);

/* STATUS_INPUT when TERRACE_ISA names no known set or one this CPU lacks. */
enum status isa_check(struct err *e);

#endif
