/* A limit on what several threads hold at once: who would go past it waits until others have given
 * back. Order and results of work must not depend on who waits. */
#ifndef FW_QUOTA_H
#define FW_QUOTA_H

#include "fault/fault.h"

#include <stddef.h>

typedef struct fw_quota fw_quota;

/* Free with fw_quota_free, when nobody holds anything. */
fw_status fw_quota_create(size_t limit, fw_quota **out, fw_fault *fault);
void fw_quota_free(fw_quota *quota); /* NULL is allowed */

/* Returns once `bytes` fit, or nobody else holds anything: a single holder may go past the limit.
 * A thread that holds some must not take more. */
void fw_quota_take(fw_quota *quota, size_t bytes);
void fw_quota_give(fw_quota *quota, size_t bytes);

#endif
