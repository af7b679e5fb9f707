/* The carried distance by definition, on dense arrays: slow, plain, and nothing of the project in
 * it.
 *
 *     A_n(x) = min over y in M_n and M_(n-1) of  max(0, A_(n-1)(y) - c) + |x - y| ,  sources 0
 *
 * M_n are the intended pixels of layer n, |x - y| the length of a path inside M_n, c = t /
 * tan(angle) the credit of a layer, and nothing to carry from is infinite. Paths are those of a
 * Dijkstra search over 16 neighbours (8 and the 8 knight moves), so A is never low; it is high by
 * at most 1 / cos(13.28 degrees) = 1.0275 where there is room for knight moves, plus a pixel or so
 * beside an edge; in slits under 3 pixels, where only 8 neighbours are left, by at most 1.0824. A
 * step needs room: a diagonal one of the two pixels that it passes, a knight move both.
 *
 *     dense_debt WIDTH HEIGHT PX_MM PY_MM CREDIT_MM REACH_MM SURE_MM < volume
 *
 * The volume is WIDTH * HEIGHT bytes a layer, row by row: bit 0 intended, bit 1 source. For every
 * layer one line: layer, pixels with finite A > REACH, with finite A > SURE, with infinite A, the
 * largest finite A in mm and its column and row (first in raster order). */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct grid {
    int width, height;
    float length[16]; /* mm, of each step */
    const uint8_t *solid;
    float *value; /* mm, INFINITY where nothing is carried */
} grid;

typedef struct step {
    int dx, dy;
} step;

static const step STEPS[16] = {{1, 0},  {-1, 0},  {0, 1},  {0, -1}, {1, 1},  {1, -1},
                               {-1, 1}, {-1, -1}, {2, 1},  {2, -1}, {-2, 1}, {-2, -1},
                               {1, 2},  {1, -2},  {-1, 2}, {-1, -2}};

typedef struct entry {
    float value;
    int32_t at;
} entry;

typedef struct heap {
    entry *item;
    size_t count, capacity;
} heap;

static void die(const char *what)
{
    fprintf(stderr, "dense_debt: %s\n", what);
    exit(3);
}

static void push(heap *h, entry e)
{
    if (h->count == h->capacity) {
        h->capacity = h->capacity ? 2 * h->capacity : 4096;
        h->item = realloc(h->item, h->capacity * sizeof *h->item);
        if (!h->item)
            die("out of memory");
    }
    size_t i = h->count++;
    for (; i > 0 && h->item[(i - 1) / 2].value > e.value; i = (i - 1) / 2)
        h->item[i] = h->item[(i - 1) / 2];
    h->item[i] = e;
}

static entry pop(heap *h)
{
    entry top = h->item[0], last = h->item[--h->count];
    size_t i = 0;
    for (size_t child = 1; child < h->count; child = 2 * i + 1) {
        if (child + 1 < h->count && h->item[child + 1].value < h->item[child].value)
            ++child;
        if (h->item[child].value >= last.value)
            break;
        h->item[i] = h->item[child];
        i = child;
    }
    h->item[i] = last;
    return top;
}

static int is_solid(const grid *g, int x, int y)
{
    return x >= 0 && y >= 0 && x < g->width && y < g->height &&
           (g->solid[(size_t)y * (size_t)g->width + (size_t)x] & 1);
}

static int has_room(const grid *g, int x, int y, step s)
{
    int along_x = abs(s.dx) == 2;
    if (abs(s.dx) + abs(s.dy) == 1)
        return 1;
    if (abs(s.dx) == abs(s.dy))
        return is_solid(g, x + s.dx, y) || is_solid(g, x, y + s.dy);
    if (along_x)
        return is_solid(g, x + s.dx / 2, y) && is_solid(g, x + s.dx / 2, y + s.dy);
    return is_solid(g, x, y + s.dy / 2) && is_solid(g, x + s.dx, y + s.dy / 2);
}

/* Offers the value of the pixel to its neighbours; those that it betters go on the heap. */
static void relax(const grid *g, int32_t at, heap *h)
{
    int x = at % g->width, y = at / g->width;
    for (int i = 0; i < 16; ++i) {
        step s = STEPS[i];
        if (!is_solid(g, x + s.dx, y + s.dy))
            continue;
        int32_t to = at + s.dy * g->width + s.dx;
        float offer = g->value[at] + g->length[i];
        if (offer < g->value[to] && has_room(g, x, y, s)) {
            g->value[to] = offer;
            push(h, (entry){offer, to});
        }
    }
}

static void spread(const grid *g, heap *h)
{
    int32_t count = g->width * g->height;
    for (int32_t at = 0; at < count; ++at)
        if ((g->solid[at] & 1) && isfinite(g->value[at]))
            relax(g, at, h);
    while (h->count) {
        entry e = pop(h);
        if (e.value <= g->value[e.at])
            relax(g, e.at, h);
    }
}

/* What each pixel of the layer starts with: 0 at a source, what it had less the credit if it was in
 * the layer before, else infinite. */
static void carry(const grid *g, const uint8_t *before, const float *old, double credit)
{
    for (int32_t at = 0; at < g->width * g->height; ++at) {
        g->value[at] = INFINITY;
        if ((g->solid[at] & 1) && (g->solid[at] & 2))
            g->value[at] = 0;
        else if ((g->solid[at] & 1) && (before[at] & 1))
            g->value[at] = fmaxf(0, old[at] - (float)credit);
    }
}

static void print_layer(const grid *g, int layer, double reach, double sure)
{
    long over = 0, surely = 0, adrift = 0;
    int32_t worst = 0;
    float largest = -1;
    for (int32_t at = 0; at < g->width * g->height; ++at) {
        if (!(g->solid[at] & 1))
            continue;
        float value = g->value[at];
        adrift += !isfinite(value);
        over += isfinite(value) && value > reach;
        surely += isfinite(value) && value > sure;
        if (isfinite(value) && value > largest) {
            largest = value;
            worst = at;
        }
    }
    printf("%d %ld %ld %ld %.4f %d %d\n", layer, over, surely, adrift, fmaxf(largest, 0),
           worst % g->width, worst / g->width);
    fflush(stdout); /* the caller reads one line for each layer that it writes */
    fflush(stdout); /* the reader answers line by line */
}

int main(int argc, char **argv)
{
    if (argc != 8) {
        fputs("usage: dense_debt WIDTH HEIGHT PX_MM PY_MM CREDIT_MM REACH_MM SURE_MM < volume\n",
              stderr);
        return 2;
    }
    grid g = {.width = atoi(argv[1]), .height = atoi(argv[2])};
    for (int i = 0; i < 16; ++i)
        g.length[i] = (float)hypot(STEPS[i].dx * atof(argv[3]), STEPS[i].dy * atof(argv[4]));
    if (g.width < 1 || g.height < 1 || g.width > 16384 || g.height > 16384)
        die("width and height must be within 1 and 16384");
    size_t size = (size_t)g.width * (size_t)g.height;
    uint8_t *now = malloc(size), *before = calloc(size, 1);
    float *value = malloc(size * sizeof *value), *old = calloc(size, sizeof *old);
    heap h = {0};
    if (!now || !before || !value || !old)
        die("out of memory");
    for (int layer = 0; fread(now, 1, size, stdin) == size; ++layer) {
        g.solid = now;
        g.value = value;
        carry(&g, before, old, atof(argv[5]));
        spread(&g, &h);
        print_layer(&g, layer, atof(argv[6]), atof(argv[7]));
        memcpy(before, now, size);
        memcpy(old, value, size * sizeof *value);
    }
    free(h.item);
    free(now);
    free(before);
    free(value);
    free(old);
    return 0;
}
