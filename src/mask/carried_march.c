/* Shortest paths over the pixels that changed. The values in the field are a fixed point of
 *
 *     A(x) = min(A(x), min over steps s in sight of x of A(x + s) + |s|)
 *
 * before pixels wake; afterwards only a pixel near a woken one, or an unknown one near a known one,
 * can be shortened at first. Those look round once (pull); then each shortened pixel, smallest
 * values first, offers its value to its neighbours (Dijkstra). All lengths are whole units, so the
 * fixed point is one and the same whatever the order. */
#include "fault/memory.h"
#include "mask/carried_field.h"

static fw_status push(fw_queue *queue, uint32_t units, uint32_t index, fw_fault *fault)
{
    fw_bucket *bucket = &queue->bucket[units / queue->width];
    FW_TRY(fw_grow((void **)&bucket->key, &bucket->capacity, bucket->count + 1, sizeof *bucket->key,
                   FW_CARRIED_HOLDER, fault));
    bucket->key[bucket->count++] = (uint64_t)units << 32 | index;
    return FW_OK;
}

static uint32_t raster_index(const fw_carried *field, int32_t x, int32_t y)
{
    return (uint32_t)y * (uint32_t)field->width + (uint32_t)x;
}

static bool in_medium(const fw_carried *field, int32_t x, int32_t y)
{
    return x >= 0 && x < field->width && y >= 0 && y < field->height &&
           fw_bitplane_at(&field->medium, x, y);
}

/* Every step from (x, y) is in sight: the usual case, found in a few words. */
static bool in_the_open(const fw_carried *field, int32_t x, int32_t y)
{
    const int32_t rx = field->steps.radius_x, ry = field->steps.radius_y;
    if (y < ry || y >= field->height - ry)
        return false;
    for (int32_t row = y - ry; row <= y + ry; row++) {
        if (!fw_bitplane_full(&field->medium, row, x - rx, x + rx + 1))
            return false;
    }
    return true;
}

static bool in_sight(const fw_carried *field, const fw_step *step, int32_t x, int32_t y)
{
    const fw_offset *crossing = field->steps.crossing;
    for (uint32_t i = step->crossed; i < step->crossed_end; i++) {
        if (!in_medium(field, x + crossing[i].dx, y + crossing[i].dy))
            return false;
    }
    const fw_offset *side = crossing + step->crossed_end;
    return !step->corner || in_medium(field, x + side[0].dx, y + side[0].dy) ||
           in_medium(field, x + side[1].dx, y + side[1].dy);
}

static fw_status shorten(fw_carried *field, int32_t x, int32_t y, uint32_t units, fw_fault *fault)
{
    FW_TRY(fw_carried_store(field, x, y, units, fault));
    return push(&field->queue, units, raster_index(field, x, y), fault);
}

/* Shortens (x, y) by the best that its neighbours offer. */
static fw_status pull(fw_carried *field, int32_t x, int32_t y, fw_fault *fault)
{
    const uint32_t old = fw_carried_units(field, x, y);
    const bool open = in_the_open(field, x, y);
    uint32_t best = old;
    for (size_t i = 0; i < field->steps.count; i++) {
        const fw_step *step = &field->steps.step[i];
        const int32_t to_x = x + step->dx, to_y = y + step->dy;
        if (step->length >= best || (!open && !in_medium(field, to_x, to_y)))
            continue;
        const uint32_t offer = fw_carried_units(field, to_x, to_y) + step->length;
        if (offer < best && (open || in_sight(field, step, x, y)))
            best = offer;
    }
    return best < old ? shorten(field, x, y, best, fault) : FW_OK;
}

/* Offers the value of (x, y) to its neighbours. */
static fw_status offer_round(fw_carried *field, int32_t x, int32_t y, uint32_t units,
                             fw_fault *fault)
{
    const bool open = in_the_open(field, x, y);
    for (size_t i = 0; i < field->steps.count; i++) {
        const fw_step *step = &field->steps.step[i];
        const int32_t to_x = x + step->dx, to_y = y + step->dy;
        const uint32_t offer = units + step->length;
        if (offer >= field->saturation || (!open && !in_medium(field, to_x, to_y)))
            continue;
        if (offer < fw_carried_units(field, to_x, to_y) && (open || in_sight(field, step, x, y)))
            FW_TRY(shorten(field, to_x, to_y, offer, fault));
    }
    return FW_OK;
}

static fw_status march_from(fw_carried *field, uint64_t key, fw_fault *fault)
{
    const uint32_t units = (uint32_t)(key >> 32), index = (uint32_t)key;
    const int32_t x = (int32_t)(index % (uint32_t)field->width);
    const int32_t y = (int32_t)(index / (uint32_t)field->width);
    if (fw_carried_units(field, x, y) != units)
        return FW_OK; /* it was shortened once more */
    return offer_round(field, x, y, units, fault);
}

static fw_status march(fw_carried *field, fw_fault *fault)
{
    for (size_t b = 0; b < field->queue.count; b++) {
        fw_bucket *bucket = &field->queue.bucket[b]; /* what is offered goes to later ones */
        for (size_t i = 0; i < bucket->count; i++)
            FW_TRY(march_from(field, bucket->key[i], fault));
        bucket->count = 0;
    }
    return FW_OK;
}

/* Who looks round, and next to whom. */
typedef enum look {
    UNKNOWN_BY_KNOWN, /* the edge of the unknown */
    SLEEPER_BY_WOKEN, /* what did not change next to what did */
} look;

static uint32_t lookers(const fw_carried *field, look who, int32_t y, int32_t column)
{
    const uint32_t unknown = *fw_bitplane_word(&field->unknown, y, column);
    if (who == UNKNOWN_BY_KNOWN)
        return unknown;
    return *fw_bitplane_word(&field->medium, y, column) &
           ~*fw_bitplane_word(&field->woken, y, column);
}

static uint32_t looked_at(const fw_carried *field, look who, int32_t y, int32_t column)
{
    if (who == UNKNOWN_BY_KNOWN)
        return *fw_bitplane_word(&field->medium, y, column) &
               ~*fw_bitplane_word(&field->unknown, y, column);
    return *fw_bitplane_word(&field->woken, y, column);
}

/* Bits of the middle word that have a set bit within reach (at most 31) in the three words. */
static uint32_t widen(const uint32_t word[3], int32_t reach)
{
    uint32_t wide = word[1];
    for (int32_t k = 1; k <= reach; k++) {
        wide |= word[1] << k | word[0] >> (32 - k);
        wide |= word[1] >> k | word[2] << (32 - k);
    }
    return wide;
}

/* Pixels of one word of row y that have a looked_at pixel within the steps' box. */
static uint32_t near(const fw_carried *field, look who, int32_t y, int32_t column)
{
    const int32_t reach = field->steps.radius_y;
    const int32_t first = y - reach > 0 ? y - reach : 0;
    const int32_t last = y + reach < field->height - 1 ? y + reach : field->height - 1;
    uint32_t word[3] = {0, 0, 0};
    for (int32_t row = first; row <= last; row++) {
        for (int32_t k = 0; k < 3; k++)
            word[k] |= looked_at(field, who, row, column - 1 + k);
    }
    return widen(word, field->steps.radius_x);
}

static fw_status add_pending(fw_carried *field, int32_t y, int32_t column, uint32_t mask,
                             fw_fault *fault)
{
    fw_pixel_list *list = &field->pending;
    FW_TRY(fw_grow((void **)&list->index, &list->capacity, list->count + 32, sizeof *list->index,
                   FW_CARRIED_HOLDER, fault));
    for (int32_t bit = 0; bit < 32; bit++) {
        const int32_t x = column * 32 + bit;
        if ((mask >> bit & 1U) != 0 && fw_carried_units(field, x, y) > 0)
            list->index[list->count++] = raster_index(field, x, y);
    }
    return FW_OK;
}

static fw_status gather_tile(fw_carried *field, look who, int32_t column, int32_t tile_row,
                             fw_fault *fault)
{
    const int32_t first = tile_row * FW_TILE;
    const int32_t end = field->height - first < FW_TILE ? field->height : first + FW_TILE;
    for (int32_t y = first; y < end; y++) {
        uint32_t mask = lookers(field, who, y, column);
        if (mask != 0)
            mask &= near(field, who, y, column);
        if (mask != 0)
            FW_TRY(add_pending(field, y, column, mask, fault));
    }
    return FW_OK;
}

/* The first woken tile among this one and the eight round it. */
static size_t first_woken_near(const fw_carried *field, int32_t column, int32_t row)
{
    for (int32_t r = row - (row > 0); r <= row + 1 && r < field->tiles_y; r++) {
        for (int32_t c = column - (column > 0); c <= column + 1 && c < field->tiles_x; c++) {
            if (field->tile_woken[fw_tile_index(field, c, r)] != 0)
                return fw_tile_index(field, c, r);
        }
    }
    return SIZE_MAX;
}

/* Steps reach no further than the tiles round a woken one. A tile with several woken ones round it
 * is left to the first of them. */
static fw_status gather_round(fw_carried *field, size_t woken, bool entered, fw_fault *fault)
{
    const int32_t column = (int32_t)(woken % (size_t)field->tiles_x);
    const int32_t row = (int32_t)(woken / (size_t)field->tiles_x);
    for (int32_t r = row - (row > 0); r <= row + 1 && r < field->tiles_y; r++) {
        for (int32_t c = column - (column > 0); c <= column + 1 && c < field->tiles_x; c++) {
            const size_t index = fw_tile_index(field, c, r);
            const bool unknown = field->unknown_in_tile[index] > 0;
            if ((!unknown && field->tile[index] == NULL) || /* all 0: nothing to shorten */
                first_woken_near(field, c, r) != woken)
                continue;
            if (unknown && entered)
                FW_TRY(gather_tile(field, UNKNOWN_BY_KNOWN, c, r, fault));
            FW_TRY(gather_tile(field, SLEEPER_BY_WOKEN, c, r, fault));
        }
    }
    return FW_OK;
}

static fw_status gather_unknown(fw_carried *field, fw_fault *fault)
{
    for (int32_t row = 0; row < field->tiles_y; row++) {
        for (int32_t column = 0; column < field->tiles_x; column++) {
            if (field->unknown_in_tile[fw_tile_index(field, column, row)] > 0)
                FW_TRY(gather_tile(field, UNKNOWN_BY_KNOWN, column, row, fault));
        }
    }
    return FW_OK;
}

static fw_status gather(fw_carried *field, fw_carried_change change, fw_fault *fault)
{
    field->pending.count = 0;
    if (change == FW_CHANGED_CREDIT)
        FW_TRY(gather_unknown(field, fault));
    for (size_t i = 0; i < field->woken_tiles; i++)
        FW_TRY(gather_round(field, field->woken_tile[i], change == FW_CHANGED_MEDIUM, fault));
    return FW_OK;
}

static void sleep_again(fw_carried *field)
{
    for (size_t i = 0; i < field->woken_tiles; i++) {
        const uint32_t index = field->woken_tile[i];
        const int32_t column = (int32_t)(index % (uint32_t)field->tiles_x);
        const int32_t first = (int32_t)(index / (uint32_t)field->tiles_x) * FW_TILE;
        field->tile_woken[index] = 0;
        for (int32_t y = first; y < field->height && y < first + FW_TILE; y++)
            *fw_bitplane_word(&field->woken, y, column) = 0;
    }
    field->woken_tiles = 0;
}

fw_status fw_carried_settle(fw_carried *field, fw_carried_change change, fw_fault *fault)
{
    fw_status status = gather(field, change, fault);
    sleep_again(field);
    for (size_t i = 0; status == FW_OK && i < field->pending.count; i++) {
        const uint32_t index = field->pending.index[i];
        status = pull(field, (int32_t)(index % (uint32_t)field->width),
                      (int32_t)(index / (uint32_t)field->width), fault);
    }
    return status == FW_OK ? march(field, fault) : status;
}
