/* SPDX-License-Identifier: GPL-3.0-or-later */
/* isa.c: the instruction set in force, asked of the CPU and of TERRACE_ISA. */
#include "base/isa.h"

#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "base/vecmath.h"

static bool cpu_has(enum isa isa)
{
    __builtin_cpu_init();
    return isa == ISA_SSE2 || __builtin_cpu_supports("avx2");
}

static const struct vecmath *const tables[ISA_COUNT] = {&vecmath_sse2, &vecmath_avx2};

enum isa isa_in_force(void)
{
    const char *asked = getenv("TERRACE_ISA");
    for (enum isa i = ISA_SSE2; asked && i < ISA_COUNT; i++)
        if (strcmp(asked, tables[i]->name) == 0 && cpu_has(i))
            return i;
    return cpu_has(ISA_AVX2) ? ISA_AVX2 : ISA_SSE2;
}

enum status isa_check(struct err *e)
{
    const char *asked = getenv("TERRACE_ISA");
    if (!asked || !*asked)
        return STATUS_OK;
    for (enum isa i = ISA_SSE2; i < ISA_COUNT; i++)
        if (strcmp(asked, tables[i]->name) == 0)
            return cpu_has(i) ? STATUS_OK
                              : err_add(e, STATUS_INPUT, NULL, 0, NULL,
                                        "TERRACE_ISA: this processor has no %s", asked);
    return err_add(e, STATUS_INPUT, NULL, 0, NULL,
                   "TERRACE_ISA: \"%s\" is not an instruction set known here; allowed: sse2, avx2",
                   asked);
}

const struct vecmath *vecmath(void)
{
    return tables[isa_in_force()];
}
