#include "fault/quota.h"

#include "fault/memory.h"

#include <pthread.h>
#include <stdlib.h>

/* OpenMP has no way to sleep until something changes; POSIX threads have. */
struct fw_quota {
    pthread_mutex_t lock;
    pthread_cond_t given;
    size_t limit, used;
};

fw_status fw_quota_create(size_t limit, fw_quota **out, fw_fault *fault)
{
    fw_quota *quota = NULL;
    FW_TRY(fw_allocate((void **)&quota, 1, sizeof *quota, "quota", fault));
    quota->limit = limit;
    if (pthread_mutex_init(&quota->lock, NULL) != 0) {
        free(quota);
        return fw_fault_memory(fault, "quota");
    }
    if (pthread_cond_init(&quota->given, NULL) != 0) {
        (void)pthread_mutex_destroy(&quota->lock);
        free(quota);
        return fw_fault_memory(fault, "quota");
    }
    *out = quota;
    return FW_OK;
}

void fw_quota_free(fw_quota *quota)
{
    if (quota == NULL)
        return;
    (void)pthread_cond_destroy(&quota->given);
    (void)pthread_mutex_destroy(&quota->lock);
    free(quota);
}

static bool fits(const fw_quota *quota, size_t bytes)
{
    return quota->used == 0 || (bytes <= quota->limit && quota->used <= quota->limit - bytes);
}

void fw_quota_take(fw_quota *quota, size_t bytes)
{
    (void)pthread_mutex_lock(&quota->lock);
    while (!fits(quota, bytes))
        (void)pthread_cond_wait(&quota->given, &quota->lock);
    quota->used += bytes;
    (void)pthread_mutex_unlock(&quota->lock);
}

void fw_quota_give(fw_quota *quota, size_t bytes)
{
    (void)pthread_mutex_lock(&quota->lock);
    quota->used -= bytes;
    (void)pthread_cond_broadcast(&quota->given);
    (void)pthread_mutex_unlock(&quota->lock);
}
