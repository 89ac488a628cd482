/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_sha256.c: the published digests of FIPS 180-4, with and without padding into a new block. */
#include "base/sha256.h"

#include <string.h>

#include "base/mem.h"
#include "unit.h"

static void published_digests(void)
{
    static const char two_blocks[] = "abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq";
    char out[SHA256_HEX];
    CU_ASSERT_STRING_EQUAL(sha256_hex(out, "", 0),
                           "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
    CU_ASSERT_STRING_EQUAL(sha256_hex(out, "abc", 3),
                           "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    CU_ASSERT_STRING_EQUAL(sha256_hex(out, two_blocks, strlen(two_blocks)),
                           "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1");
}

static void million_letters(void)
{
    enum { MILLION = 1000000 };
    char out[SHA256_HEX], *a = mem_new(MILLION, 1);
    memset(a, 'a', MILLION);
    CU_ASSERT_STRING_EQUAL(sha256_hex(out, a, MILLION),
                           "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0");
    mem_free(a);
}

static const struct unit_test tests[] = {
    {"published digests", published_digests},
    {"a million letters", million_letters},
    UNIT_END,
};

int main(void)
{
    return unit_main("SHA-256", tests);
}
