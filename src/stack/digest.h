/* SHA-256 (FIPS 180-4) of bytes, and the digest of a whole stack. */
#ifndef FW_DIGEST_H
#define FW_DIGEST_H

#include "fault/fault.h"

#include <stdint.h>

enum { FW_SHA256 = 32, FW_SHA256_HEX = 65 };

fw_status fw_sha256(const void *bytes, size_t size, uint8_t sha256[FW_SHA256], fw_fault *fault);
void fw_sha256_hex(const uint8_t sha256[FW_SHA256], char hex[FW_SHA256_HEX]);

/* Bytes that come in pieces. */
typedef struct fw_hash fw_hash;
fw_status fw_hash_open(fw_hash **out, fw_fault *fault);
fw_status fw_hash_add(fw_hash *hash, const void *bytes, size_t size, fw_fault *fault);
fw_status fw_hash_finish(fw_hash *hash, uint8_t sha256[FW_SHA256], fw_fault *fault);
void fw_hash_close(fw_hash *hash); /* NULL is allowed */

/* A stack's digest is SHA-256 over the lines "digest index\n" (hex of the layer file's SHA-256,
 * space, layer number from 0) in layer order. Adds the next layer's line. */
fw_status fw_hash_add_layer(fw_hash *hash, const uint8_t sha256[FW_SHA256], int32_t index,
                            fw_fault *fault);

/* The digest of a stack whose layers' digests are all there. */
fw_status fw_sha256_of_stack(const uint8_t (*layers)[FW_SHA256], int32_t count,
                             uint8_t sha256[FW_SHA256], fw_fault *fault);

#endif
