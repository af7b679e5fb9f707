/* The packed form, all numbers as base-128 varints, low groups first:
 *
 *     width, height, full, then tokens until `height` rows are told:
 *     0, n           n rows like the row above (the row above row 0 is empty)
 *     1, edges       as many runs as the row above, each told against the run there:
 *                    [zigzag(dx0) * 2 + same grey], zigzag(dx1), and the grey unless the same
 *     k + 2, runs    k runs, each: [gap * 2 + fully lit], length - 1, and the grey unless lit fully
 *
 * zigzag folds signs into the low bit (0, -1, 1, -2 .. to 0, 1, 2, 3 ..), so that small shifts of
 * an edge, the usual case between rows of a solid part, take one byte.
 */
#include "stack/packed.h"

#include "fault/memory.h"
#include "stack/grey_rows.h"

static const char holder[] = "packed layers";

enum { TOKEN_REPEAT = 0, TOKEN_SHIFTED = 1, TOKEN_FRESH = 2 };
enum { SIDE_LIMIT = 65535, FULL_LIMIT = 65535 };

/* No number here needs more than 32 bits, so 5 groups of 7; a run takes at most 3 numbers. */
enum { VARINT_SIZE = 5, RUN_SIZE = 3 * VARINT_SIZE };

static uint8_t *put(uint8_t *to, uint32_t value)
{
    while (value >= 128) {
        *to++ = (uint8_t)(value | 128);
        value >>= 7;
    }
    *to++ = (uint8_t)value;
    return to;
}

static uint32_t zigzag(int32_t value)
{
    return value < 0 ? (uint32_t)(-value) * 2 - 1 : (uint32_t)value * 2;
}

static int64_t unzigzag(uint64_t code)
{
    return (code & 1) != 0 ? -(int64_t)(code / 2) - 1 : (int64_t)(code / 2);
}

static uint8_t *pack_shifted(const fw_greys *layer, int32_t y, uint8_t *to)
{
    const fw_grey_run *above = layer->run + layer->row[y - 1], *run = layer->run + layer->row[y];
    const uint32_t runs = layer->row[y + 1] - layer->row[y];
    to = put(to, TOKEN_SHIFTED);
    for (uint32_t i = 0; i < runs; i++) {
        const bool same = run[i].grey == above[i].grey;
        to = put(to, zigzag(run[i].x0 - above[i].x0) * 2 + same);
        to = put(to, zigzag(run[i].x1 - above[i].x1));
        if (!same)
            to = put(to, (uint32_t)run[i].grey);
    }
    return to;
}

static uint8_t *pack_fresh(const fw_greys *layer, int32_t y, uint8_t *to)
{
    const uint32_t first = layer->row[y], runs = layer->row[y + 1] - first;
    to = put(to, TOKEN_FRESH + runs);
    int32_t x = 0;
    for (uint32_t i = first; i < first + runs; i++) {
        const fw_grey_run r = layer->run[i];
        const bool lit = r.grey == layer->full;
        to = put(to, (uint32_t)(r.x0 - x) * 2 + lit);
        to = put(to, (uint32_t)(r.x1 - r.x0 - 1));
        if (!lit)
            to = put(to, (uint32_t)r.grey);
        x = r.x1;
    }
    return to;
}

static uint32_t runs_in(const fw_greys *layer, int32_t y)
{
    return y < 0 ? 0 : layer->row[y + 1] - layer->row[y];
}

static uint8_t *pack_row(const fw_greys *layer, int32_t y, uint8_t *to)
{
    if (runs_in(layer, y) > 0 && runs_in(layer, y) == runs_in(layer, y - 1))
        return pack_shifted(layer, y, to);
    return pack_fresh(layer, y, to);
}

/* Makes room behind the bytes for a token and `runs` runs. */
static fw_status reserve(fw_bytes *out, uint32_t runs, fw_fault *fault)
{
    return fw_grow((void **)&out->data, &out->capacity,
                   out->size + 3 * VARINT_SIZE + (size_t)runs * RUN_SIZE, 1, holder, fault);
}

static void advance(fw_bytes *out, const uint8_t *to)
{
    out->size = (size_t)(to - out->data);
}

static fw_status pack_sizes(const fw_greys *layer, fw_bytes *out, fw_fault *fault)
{
    FW_TRY(reserve(out, 0, fault));
    uint8_t *to = put(out->data + out->size, (uint32_t)layer->width);
    to = put(to, (uint32_t)layer->height);
    advance(out, put(to, (uint32_t)layer->full));
    return FW_OK;
}

/* First row from y on that differs from the row above it. */
static int32_t repeats_until(const fw_greys *layer, int32_t y)
{
    while (y < layer->height && fw_greys_row_repeats(layer, y))
        y++;
    return y;
}

fw_status fw_pack(const fw_greys *layer, fw_bytes *out, fw_fault *fault)
{
    FW_TRY(pack_sizes(layer, out, fault));
    for (int32_t y = 0; y < layer->height;) {
        const int32_t end = repeats_until(layer, y);
        FW_TRY(reserve(out, end > y ? 0 : runs_in(layer, y), fault));
        uint8_t *to = out->data + out->size;
        if (end > y)
            to = put(put(to, TOKEN_REPEAT), (uint32_t)(end - y));
        else
            to = pack_row(layer, y, to);
        advance(out, to);
        y = end > y ? end : y + 1;
    }
    return FW_OK;
}

typedef struct reader {
    const uint8_t *at, *end;
    fw_greys *out;
    fw_fault *fault;
} reader;

static fw_status broken(reader *r)
{
    return fw_fault_set(r->fault, FW_MACHINE,
                        "a packed layer came back damaged, memory or temporary file, check the "
                        "disk and run again");
}

/* A number up to limit. */
static fw_status take(reader *r, uint64_t limit, uint64_t *value)
{
    *value = 0;
    for (unsigned shift = 0; shift < 63; shift += 7) {
        if (r->at == r->end)
            return broken(r);
        const uint8_t group = *r->at++;
        *value |= (uint64_t)(group & 127) << shift;
        if (group < 128)
            return *value <= limit ? FW_OK : broken(r);
    }
    return broken(r);
}

static fw_status take_grey(reader *r, int32_t *grey)
{
    uint64_t value;
    FW_TRY(take(r, (uint64_t)r->out->full, &value));
    *grey = (int32_t)value;
    return value > 0 ? FW_OK : broken(r);
}

static fw_status push(reader *r, int32_t y, int64_t least, int64_t x0, int64_t x1, int32_t grey)
{
    if (x0 < least || x1 <= x0 || x1 > r->out->width)
        return broken(r);
    return fw_greys_push(r->out, y, (int32_t)x0, (int32_t)x1, grey, r->fault);
}

static fw_status unpack_shifted(reader *r, int32_t y)
{
    if (y == 0)
        return broken(r);
    fw_greys_close_before(r->out, y);
    const uint32_t first = r->out->row[y - 1], runs = r->out->row[y] - first;
    int64_t least = 0;
    for (uint32_t i = 0; i < runs; i++) {
        const fw_grey_run above = r->out->run[first + i];
        uint64_t start, stop;
        FW_TRY(take(r, 8 * (uint64_t)SIDE_LIMIT, &start));
        FW_TRY(take(r, 4 * (uint64_t)SIDE_LIMIT, &stop));
        int32_t grey = above.grey;
        if ((start & 1) == 0)
            FW_TRY(take_grey(r, &grey));
        const int64_t x0 = above.x0 + unzigzag(start / 2), x1 = above.x1 + unzigzag(stop);
        FW_TRY(push(r, y, least, x0, x1, grey));
        least = x1;
    }
    return FW_OK;
}

static fw_status unpack_fresh(reader *r, int32_t y, uint64_t runs)
{
    int64_t x = 0;
    for (uint64_t i = 0; i < runs; i++) {
        uint64_t gap, length;
        FW_TRY(take(r, 4 * (uint64_t)SIDE_LIMIT, &gap));
        FW_TRY(take(r, SIDE_LIMIT, &length));
        int32_t grey = r->out->full;
        if ((gap & 1) == 0)
            FW_TRY(take_grey(r, &grey));
        const int64_t x0 = x + (int64_t)(gap / 2), x1 = x0 + (int64_t)length + 1;
        FW_TRY(push(r, y, x, x0, x1, grey));
        x = x1;
    }
    return FW_OK;
}

/* Reads one token; *y moves on to the next row to be told. */
static fw_status unpack_token(reader *r, int32_t *y)
{
    uint64_t token, rows = 1;
    FW_TRY(take(r, SIDE_LIMIT + TOKEN_FRESH, &token));
    if (token == TOKEN_REPEAT) {
        FW_TRY(take(r, (uint64_t)(r->out->height - *y), &rows));
        for (uint64_t i = 0; i < rows; i++)
            FW_TRY(fw_greys_repeat_row(r->out, *y + (int32_t)i, r->fault));
    } else if (token == TOKEN_SHIFTED) {
        FW_TRY(unpack_shifted(r, *y));
    } else {
        FW_TRY(unpack_fresh(r, *y, token - TOKEN_FRESH));
    }
    *y += (int32_t)rows;
    return FW_OK;
}

fw_status fw_unpack(const uint8_t *bytes, size_t size, fw_greys *out, fw_fault *fault)
{
    reader r = {bytes, bytes + size, out, fault};
    uint64_t width, height, full;
    FW_TRY(take(&r, SIDE_LIMIT, &width));
    FW_TRY(take(&r, SIDE_LIMIT, &height));
    FW_TRY(take(&r, FULL_LIMIT, &full));
    FW_TRY(fw_greys_begin(out, (int32_t)width, (int32_t)height, (int32_t)full, fault));
    for (int32_t y = 0; y < out->height;)
        FW_TRY(unpack_token(&r, &y));
    fw_greys_finish(out);
    return r.at == r.end ? FW_OK : broken(&r);
}
