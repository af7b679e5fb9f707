#include "stack/digest.h"

#include "fault/memory.h"

#include <openssl/evp.h>
#include <stdio.h>
#include <stdlib.h>

struct fw_hash {
    EVP_MD_CTX *context;
};

static fw_status library_fault(fw_fault *fault)
{
    return fw_fault_set(fault, FW_MACHINE,
                        "cannot compute SHA-256, libcrypto, check its installation");
}

fw_status fw_sha256(const void *bytes, size_t size, uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    static const uint8_t nothing[1];
    const void *data = size > 0 ? bytes : nothing;
    if (EVP_Digest(data, size, sha256, NULL, EVP_sha256(), NULL) != 1)
        return library_fault(fault);
    return FW_OK;
}

void fw_sha256_hex(const uint8_t sha256[FW_SHA256], char hex[FW_SHA256_HEX])
{
    static const char digit[] = "0123456789abcdef";
    for (int i = 0; i < FW_SHA256; i++) {
        hex[2 * i] = digit[sha256[i] >> 4];
        hex[2 * i + 1] = digit[sha256[i] & 15];
    }
    hex[2 * FW_SHA256] = '\0';
}

fw_status fw_hash_open(fw_hash **out, fw_fault *fault)
{
    FW_TRY(fw_allocate((void **)out, 1, sizeof **out, "a digest", fault));
    (*out)->context = EVP_MD_CTX_new();
    if ((*out)->context != NULL && EVP_DigestInit_ex((*out)->context, EVP_sha256(), NULL) == 1)
        return FW_OK;
    fw_hash_close(*out);
    *out = NULL;
    return library_fault(fault);
}

fw_status fw_hash_add(fw_hash *hash, const void *bytes, size_t size, fw_fault *fault)
{
    if (size > 0 && EVP_DigestUpdate(hash->context, bytes, size) != 1)
        return library_fault(fault);
    return FW_OK;
}

fw_status fw_hash_finish(fw_hash *hash, uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    return EVP_DigestFinal_ex(hash->context, sha256, NULL) == 1 ? FW_OK : library_fault(fault);
}

void fw_hash_close(fw_hash *hash)
{
    if (hash == NULL)
        return;
    EVP_MD_CTX_free(hash->context);
    free(hash);
}

fw_status fw_hash_add_layer(fw_hash *hash, const uint8_t sha256[FW_SHA256], int32_t index,
                            fw_fault *fault)
{
    char hex[FW_SHA256_HEX], line[FW_SHA256_HEX + 16];
    fw_sha256_hex(sha256, hex);
    const int size = snprintf(line, sizeof line, "%s %d\n", hex, (int)index);
    return fw_hash_add(hash, line, (size_t)size, fault);
}

static fw_status add_layers(fw_hash *hash, const uint8_t (*layers)[FW_SHA256], int32_t count,
                            uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    for (int32_t i = 0; i < count; i++)
        FW_TRY(fw_hash_add_layer(hash, layers[i], i, fault));
    return fw_hash_finish(hash, sha256, fault);
}

fw_status fw_sha256_of_stack(const uint8_t (*layers)[FW_SHA256], int32_t count,
                             uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    fw_hash *hash;
    FW_TRY(fw_hash_open(&hash, fault));
    fw_status status = add_layers(hash, layers, count, sha256, fault);
    fw_hash_close(hash);
    return status;
}
