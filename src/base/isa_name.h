/* SPDX-License-Identifier: GPL-3.0-or-later */
/* isa_name.h: names of what a source exports once per instruction set: ISA_NAME(kernel) is
 * kernel_sse2 in the copy compiled with -DISA=sse2. */
#ifndef TERRACE_ISA_NAME_H
#define TERRACE_ISA_NAME_H

#define ISA_PASTE_(a, b) a##_##b
#define ISA_PASTE(a, b) ISA_PASTE_(a, b)
#define ISA_NAME(name) ISA_PASTE(name, ISA)
#define ISA_TEXT_(x) #x
#define ISA_TEXT__(x) ISA_TEXT_(x)
#define ISA_TEXT ISA_TEXT__(ISA)

#endif
