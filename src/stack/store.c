#include "stack/store.h"

#include "stack/packed.h"
#include "stack/spill.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

/* Formats stay in memory; beyond this the layers differ so much in their metadata that it is no
 * stack of masks any more. */
enum { FORMATS_LIMIT = 32 * 1024 * 1024 };

static const char holder[] = "layer store";

typedef struct entry {
    uint8_t *packed; /* NULL = in the file; owned unless shared */
    uint64_t offset; /* in the file */
    size_t size;
    size_t format; /* index of its format */
    bool shared;   /* the bytes are those of the entry before */
    uint8_t sha256[FW_SHA256];
} entry;

struct fw_store {
    fw_budget *budget;
    fw_spill spill;
    entry *layer;
    size_t count, capacity;
    fw_png_format **format; /* [format_count], each owned, all different */
    size_t format_count, format_capacity;
    size_t format_bytes, memory_bytes;
    fw_bytes scratch;
};

fw_status fw_store_open(fw_budget *budget, const char *directory, fw_store **out, fw_fault *fault)
{
    FW_TRY(fw_allocate((void **)out, 1, sizeof **out, holder, fault));
    (*out)->budget = budget;
    fw_spill_begin(&(*out)->spill, directory);
    return FW_OK;
}

static fw_status add_format(fw_store *store, const fw_png_format *format, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&store->format, &store->format_capacity, store->format_count + 1,
                   sizeof *store->format, holder, fault));
    fw_png_format *copy;
    FW_TRY(fw_allocate((void **)&copy, 1, sizeof *copy, holder, fault));
    store->format[store->format_count++] = copy;
    FW_TRY(fw_png_format_copy(format, copy, fault));
    const size_t size = fw_png_format_size(copy);
    store->format_bytes += size;
    fw_budget_charge(store->budget, size);
    if (store->format_bytes > FORMATS_LIMIT)
        return fw_fault_set(fault, FW_INPUT,
                            "over %d MiB of texts and profiles that differ from mask to mask, %s, "
                            "export the stack without them",
                            FORMATS_LIMIT / (1024 * 1024), holder);
    return FW_OK;
}

/* Newest first: most often it is the format of the layer before. */
static fw_status find_format(fw_store *store, const fw_png_format *format, size_t *index,
                             fw_fault *fault)
{
    for (size_t i = store->format_count; i-- > 0;) {
        if (fw_png_format_equal(store->format[i], format)) {
            *index = i;
            return FW_OK;
        }
    }
    *index = store->format_count;
    return add_format(store, format, fault);
}

static fw_status keep_packed(fw_store *store, entry *e, fw_fault *fault)
{
    e->size = store->scratch.size;
    if (!fw_budget_fits(store->budget, e->size))
        return fw_spill_put(&store->spill, store->scratch.data, e->size, &e->offset, fault);
    FW_TRY(fw_allocate((void **)&e->packed, e->size, 1, holder, fault));
    memcpy(e->packed, store->scratch.data, e->size);
    fw_budget_charge(store->budget, e->size);
    store->memory_bytes += e->size;
    return FW_OK;
}

static fw_status fill_entry(fw_store *store, const fw_layer *layer, entry *e, fw_fault *fault)
{
    if (layer->same_as_before && store->count > 0) {
        *e = store->layer[store->count - 1];
        e->shared = true;
        return FW_OK;
    }
    *e = (entry){0};
    memcpy(e->sha256, layer->sha256, FW_SHA256);
    FW_TRY(find_format(store, &layer->format, &e->format, fault));
    store->scratch.size = 0;
    FW_TRY(fw_pack(&layer->greys, &store->scratch, fault));
    return keep_packed(store, e, fault);
}

fw_status fw_store_put(fw_store *store, const fw_layer *layer, fw_fault *fault)
{
    assert(layer->index == fw_store_count(store));
    FW_TRY(fw_grow((void **)&store->layer, &store->capacity, store->count + 1, sizeof *store->layer,
                   holder, fault));
    FW_TRY(fill_entry(store, layer, &store->layer[store->count], fault));
    store->count++;
    return FW_OK;
}

static fw_status get_from_file(const fw_store *store, const entry *e, fw_greys *out,
                               fw_fault *fault)
{
    uint8_t *packed;
    FW_TRY(fw_allocate((void **)&packed, e->size, 1, holder, fault));
    fw_status status = fw_spill_get(&store->spill, e->offset, packed, e->size, fault);
    if (status == FW_OK)
        status = fw_unpack(packed, e->size, out, fault);
    free(packed);
    return status;
}

fw_status fw_store_get(const fw_store *store, int32_t index, fw_greys *out, fw_fault *fault)
{
    assert(0 <= index && index < fw_store_count(store));
    const entry *e = &store->layer[index];
    if (e->packed != NULL)
        return fw_unpack(e->packed, e->size, out, fault);
    return get_from_file(store, e, out, fault);
}

int32_t fw_store_count(const fw_store *store)
{
    return (int32_t)store->count;
}

const fw_png_format *fw_store_format(const fw_store *store, int32_t index)
{
    return store->format[store->layer[index].format];
}

const uint8_t *fw_store_sha256(const fw_store *store, int32_t index)
{
    return store->layer[index].sha256;
}

size_t fw_store_bytes(const fw_store *store)
{
    return store->memory_bytes + fw_store_bytes_in_file(store);
}

size_t fw_store_bytes_in_file(const fw_store *store)
{
    return (size_t)store->spill.size;
}

void fw_store_close(fw_store *store)
{
    if (store == NULL)
        return;
    for (size_t i = 0; i < store->count; i++) {
        if (!store->layer[i].shared)
            free(store->layer[i].packed);
    }
    for (size_t i = 0; i < store->format_count; i++) {
        fw_png_format_free(store->format[i]);
        free(store->format[i]);
    }
    fw_budget_release(store->budget, store->memory_bytes + store->format_bytes);
    fw_spill_end(&store->spill);
    fw_bytes_free(&store->scratch);
    free(store->format);
    free(store->layer);
    free(store);
}
