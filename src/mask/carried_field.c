#include "mask/carried_field.h"

#include "fault/memory.h"

#include <assert.h>
#include <stdlib.h>

/* Moves the base of a tile to what is paid by now, so that new values fit in 16 bits. */
static void base_anew(fw_carried *field, fw_tile *tile)
{
    tile->top = 0;
    for (size_t i = 0; i < FW_TILE_PIXELS; i++) {
        const uint32_t units = fw_tile_value(field, tile, i);
        tile->value[i] = (uint16_t)units;
        if (units > tile->top)
            tile->top = units;
    }
    tile->base = field->paid;
}

static fw_status tile_for_writing(fw_carried *field, size_t index, fw_tile **out, fw_fault *fault)
{
    if (field->tile[index] == NULL) {
        FW_TRY(fw_allocate((void **)&field->tile[index], 1, sizeof *field->tile[index],
                           FW_CARRIED_HOLDER, fault));
        field->tile[index]->base = field->paid;
    }
    *out = field->tile[index];
    if (field->paid - (*out)->base + field->saturation > UINT16_MAX)
        base_anew(field, *out);
    return FW_OK;
}

/* Number of set bits: sums of pairs, of fours, of bytes, and the four bytes by one product. */
static uint32_t bit_count(uint32_t word)
{
    word -= word >> 1 & 0x55555555U;
    word = (word & 0x33333333U) + (word >> 2 & 0x33333333U);
    word = (word + (word >> 4)) & 0x0f0f0f0fU;
    return word * 0x01010101U >> 24;
}

/* Clears the unknown bits of a mask in one word and returns those that were set. */
static uint32_t become_known(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    uint32_t *word = fw_bitplane_word(&field->unknown, y, column);
    const uint32_t changed = *word & mask;
    *word &= ~mask;
    uint16_t *count = &field->unknown_in_tile[fw_tile_index(field, column, y / FW_TILE)];
    *count = (uint16_t)(*count - bit_count(changed));
    return changed;
}

fw_status fw_carried_store(fw_carried *field, int32_t x, int32_t y, uint32_t units, fw_fault *fault)
{
    assert(units > 0 && units < field->saturation);
    fw_tile *tile = NULL;
    FW_TRY(tile_for_writing(field, fw_tile_index(field, x / FW_TILE, y / FW_TILE), &tile, fault));
    become_known(field, y, x / FW_TILE, UINT32_C(1) << x % FW_TILE);
    const uint32_t value = (uint32_t)(field->paid - tile->base) + units;
    tile->value[fw_tile_pixel(x, y)] = (uint16_t)value;
    if (value > tile->top)
        tile->top = value;
    return FW_OK;
}

void fw_carried_pay(fw_carried *field, double credit_units)
{
    field->credits += credit_units;
    /* The slack keeps a sum of credits that is a whole number of units whole. */
    field->paid = (int64_t)(field->credits + 1e-6);
    const size_t tiles = (size_t)field->tiles_x * (size_t)field->tiles_y;
    for (size_t i = 0; i < tiles; i++) {
        fw_tile *tile = field->tile[i];
        if (tile != NULL && tile->base + tile->top <= field->paid) {
            free(tile);
            field->tile[i] = NULL;
        }
    }
}

static void wake(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    const size_t index = fw_tile_index(field, column, y / FW_TILE);
    *fw_bitplane_word(&field->woken, y, column) |= mask;
    if (field->tile_woken[index] == 0)
        field->woken_tile[field->woken_tiles++] = (uint32_t)index;
    field->tile_woken[index] = 1;
}

static void enter_word(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    *fw_bitplane_word(&field->medium, y, column) |= mask;
    *fw_bitplane_word(&field->unknown, y, column) |= mask;
    uint16_t *count = &field->unknown_in_tile[fw_tile_index(field, column, y / FW_TILE)];
    *count = (uint16_t)(*count + bit_count(mask));
    wake(field, y, column, mask);
}

/* Sets the stored values of a mask to 0 and returns the pixels that were above 0. */
static uint32_t clear_values(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    fw_tile *tile = field->tile[fw_tile_index(field, column, y / FW_TILE)];
    uint32_t changed = 0;
    for (int32_t bit = 0; tile != NULL && bit < FW_TILE; bit++) {
        const size_t pixel = fw_tile_pixel(bit, y);
        if ((mask >> bit & 1U) == 0)
            continue;
        changed |= (uint32_t)(fw_tile_value(field, tile, pixel) > 0) << bit;
        tile->value[pixel] = 0;
    }
    return changed;
}

static void leave_word(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    *fw_bitplane_word(&field->medium, y, column) &= ~mask;
    become_known(field, y, column, mask);
}

static void source_word(fw_carried *field, int32_t y, int32_t column, uint32_t mask)
{
    mask &= *fw_bitplane_word(&field->medium, y, column);
    const uint32_t changed =
        become_known(field, y, column, mask) | clear_values(field, y, column, mask);
    if (changed != 0)
        wake(field, y, column, changed);
}

typedef void word_action(fw_carried *field, int32_t y, int32_t column, uint32_t mask);

static void for_each_word(fw_carried *field, const fw_runs *set, word_action *act)
{
    for (int32_t y = 0; y < set->height; y++) {
        for (uint32_t i = set->row[y]; i < set->row[y + 1]; i++) {
            const fw_run run = set->run[i];
            for (int32_t column = run.x0 / 32; column <= (run.x1 - 1) / 32; column++)
                act(field, y, column, fw_bitplane_mask(column, run.x0, run.x1));
        }
    }
}

void fw_carried_enter(fw_carried *field, const fw_runs *fresh)
{
    for_each_word(field, fresh, enter_word);
}

void fw_carried_leave(fw_carried *field, const fw_runs *gone)
{
    for_each_word(field, gone, leave_word);
}

void fw_carried_source(fw_carried *field, const fw_runs *sources)
{
    for_each_word(field, sources, source_word);
}
