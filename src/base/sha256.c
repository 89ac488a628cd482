/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sha256.c: SHA-256 (FIPS 180-4) through libcrypto. */
#include "base/sha256.h"

#include <openssl/evp.h>

#include "base/base.h"
#include "base/mem.h"

const char *sha256_hex(char out[SHA256_HEX], const void *bytes, size_t length)
{
    static const char digits[] = "0123456789abcdef";
    unsigned char digest[EVP_MAX_MD_SIZE];
    unsigned int size = 0;

    if (EVP_Digest(bytes, length, digest, &size, EVP_sha256(), NULL) != 1)
        mem_exhausted();
    if (2 * size + 1 != SHA256_HEX)
        BUG("a SHA-256 digest has 32 bytes");
    for (unsigned int i = 0; i < size; i++) {
        out[2 * i] = digits[digest[i] >> 4];
        out[2 * i + 1] = digits[digest[i] & 15];
    }
    out[2 * size] = '\0';
    return out;
}
