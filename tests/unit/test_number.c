/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_number.c: numbers as text by their bits, the shortest by search, and for people. */
#include "base/number.h"

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "unit.h"

static double of_bits(uint64_t bits)
{
    double x;
    memcpy(&x, &bits, sizeof x);
    return x;
}

/* RFC 8785, appendix B, by the bits it prints (from memory); the last two rows are powers of two,
 * where the doubles below lie closer than those above. */
static void samples_by_bits(void)
{
    static const struct {
        uint64_t bits;
        const char *text;
    } samples[] = {
        {0x8000000000000000, "0"},
        {0x8000000000000001, "-5e-324"},
        {0xffefffffffffffff, "-1.7976931348623157e+308"},
        {0xc340000000000000, "-9007199254740992"},
        {0x4430000000000000, "295147905179352830000"},
        {0x44b52d02c7e14af5, "9.999999999999997e+22"},
        {0x44b52d02c7e14af6, "1e+23"},
        {0x44b52d02c7e14af7, "1.0000000000000001e+23"},
        {0x444b1ae4d6e2ef4e, "999999999999999700000"},
        {0x444b1ae4d6e2ef4f, "999999999999999900000"},
        {0x444b1ae4d6e2ef50, "1e+21"},
        {0x3eb0c6f7a0b5ed8c, "9.999999999999997e-7"},
        {0x3eb0c6f7a0b5ed8d, "0.000001"},
        {0x41b3de4355555553, "333333333.3333332"},
        {0x41b3de4355555554, "333333333.33333325"},
        {0x41b3de4355555555, "333333333.3333333"},
        {0x41b3de4355555556, "333333333.3333334"},
        {0x41b3de4355555557, "333333333.33333343"},
        {0xbecbf647612f3696, "-0.0000033333333333333333"},
        {0x43143ff3c1cb0959, "1424953923781206.2"},
        {0x3d30000000000000, "5.684341886080802e-14"},
        {0x0010000000000000, "2.2250738585072014e-308"},
    };
    char out[NUMBER_CHARS];
    for (size_t i = 0; i < COUNT_OF(samples); i++)
        CU_ASSERT_STRING_EQUAL(number_shortest(out, of_bits(samples[i].bits)), samples[i].text);
}

static int significant_digits(const char *s)
{
    int count = 0, zeros = 0;
    for (; *s != '\0' && *s != 'e'; s++) {
        if (*s < '0' || *s > '9' || (*s == '0' && count == 0))
            continue;
        zeros = *s == '0' ? zeros + 1 : 0;
        count++;
    }
    return count - zeros;
}

/* Every bit pattern reads back, and the C library finds no shorter form. */
static void shortest_by_search(void)
{
    const int draws = unit_fast() ? 20000 : 200000;
    uint64_t state = 88172645463325252u; /* Marsaglia 2003, J. Statistical Software 8:14 */
    int wrong = 0, longer = 0;
    for (int i = 0; i < draws; i++) {
        char out[NUMBER_CHARS], other[NUMBER_CHARS];
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        const double x = of_bits(i % 4 == 0 ? state & 0xfff0000000000000 : state);
        if (!isfinite(x) || x == 0.0)
            continue;
        number_shortest(out, x);
        wrong += strtod(out, NULL) != x;
        snprintf(other, sizeof other, "%.*e", significant_digits(out) - 2, x);
        longer += significant_digits(out) > 1 && strtod(other, NULL) == x;
    }
    CU_ASSERT_EQUAL(wrong, 0);
    CU_ASSERT_EQUAL(longer, 0);
}

static void for_people(void)
{
    char out[NUMBER_CHARS];
    CU_ASSERT_STRING_EQUAL(number_fixed(out, 2.675, 1), "2.7");
    CU_ASSERT_STRING_EQUAL(number_fixed(out, -0.0, 0), "0");
    CU_ASSERT_STRING_EQUAL(number_fixed(out, -0.05, 2), "-0.05");
    CU_ASSERT_STRING_EQUAL(number_fixed(out, NAN, 2), "\xE2\x80\x93");
    CU_ASSERT_STRING_EQUAL(number_fixed(out, -INFINITY, 2), "-\xE2\x88\x9E");
    CU_ASSERT_STRING_EQUAL(number_fixed(out, 1e300, 2), "1.00000000000000e+300");
    CU_ASSERT_STRING_EQUAL(number_significant(out, 0.0001, 3), "0.000100");
    CU_ASSERT_STRING_EQUAL(number_significant(out, 0.00009, 2), "9.0e-5");
    CU_ASSERT_STRING_EQUAL(number_significant(out, -1234567.0, 3), "-1230000");
    CU_ASSERT_STRING_EQUAL(number_significant(out, 1e7, 1), "1e+7");
    CU_ASSERT_STRING_EQUAL(number_significant(out, 9.996, 3), "10.0");
    CU_ASSERT(isnan(number_nine(NAN)) && isinf(number_nine(INFINITY)));
    CU_ASSERT_EQUAL(number_nine(-9.9999999996), -10.0);
}

static void decimals_an_error_earns(void)
{
    CU_ASSERT_EQUAL(number_decimals_for(0.0034, 2), 3);
    CU_ASSERT_EQUAL(number_decimals_for(0.01, 5), 2);
    CU_ASSERT_EQUAL(number_decimals_for(1.0, 5), 0);
    CU_ASSERT_EQUAL(number_decimals_for(250.0, 5), 0);
    CU_ASSERT_EQUAL(number_decimals_for(1e-12, 5), 6);
    CU_ASSERT_EQUAL(number_decimals_for(0.0, 5), 5);
    CU_ASSERT_EQUAL(number_decimals_for(NAN, 4), 4);
    CU_ASSERT_EQUAL(number_decimals_for(INFINITY, 4), 4);
}

static void refused_and_untouched(void)
{
    static const char *const wrong[] = {".", "+", "-.", "e5", "1e+", "1.5x", "1e5.0", "infinity"};
    static const char *const not_whole[] = {"",   "-",   "+",  " 1",
                                            "1 ", "1e3", "0x", "9007199254740993"};
    double x = 7.0;
    for (size_t i = 0; i < COUNT_OF(wrong); i++)
        CU_ASSERT_FALSE(number_parse(wrong[i], &x));
    for (size_t i = 0; i < COUNT_OF(not_whole); i++)
        CU_ASSERT_FALSE(number_parse_whole(not_whole[i], -1e300, 1e300, &x));
    CU_ASSERT_EQUAL(x, 7.0);
    CU_ASSERT(number_parse("5.", &x) && x == 5.0);
    CU_ASSERT(number_parse("\t+1E2 ", &x) && x == 100.0);
    CU_ASSERT(number_parse("1e-400", &x) && x == 0.0);
    CU_ASSERT(number_parse_whole("-0", 0, 9, &x) && !signbit(x));
    CU_ASSERT(number_parse_whole("9007199254740992", 0, 1e300, &x) && x == 9007199254740992.0);
}

static const struct unit_test tests[] = {
    {"shortest numbers by their bits", samples_by_bits},
    {"no shorter form reads back", shortest_by_search},
    {"numbers for people", for_people},
    {"decimals an error earns", decimals_an_error_earns},
    {"refused texts leave the number alone", refused_and_untouched},
    UNIT_END,
};

int main(void)
{
    return unit_main("number", tests);
}
