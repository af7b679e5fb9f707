/* A slow, obvious flood through the pixels of a small stack: what the judge's bodies are held
 * against. */
#ifndef FW_TEST_FLOOD_H
#define FW_TEST_FLOOD_H

#include "check/stage.h"

/* Marks all that is reached from the marked pixels within layers 0 .. top: through pixels whose
 * solidity is `solid`; in the layer to 4 or 8 neighbours, from layer to layer through the same
 * pixel. mark [layers][height][width]. */
static inline void flood(const stage *s, bool solid, int neighbours, int top, uint8_t *mark)
{
    static const int step[10][3] = {{1, 0, 0},  {-1, 0, 0}, {0, 1, 0},  {0, -1, 0}, {0, 0, 1},
                                    {0, 0, -1}, {1, 1, 0},  {-1, 1, 0}, {1, -1, 0}, {-1, -1, 0}};
    const int steps = neighbours == 8 ? 10 : 6;
    for (bool again = true; again;) {
        again = false;
        for (int n = 0; n <= top; n++) {
            for (int y = 0; y < s->height; y++) {
                for (int x = 0; x < s->width; x++) {
                    uint8_t *at = &mark[(n * s->height + y) * s->width + x];
                    if (*at != 0 || stage_at(s, x, y, n) != solid)
                        continue;
                    for (int k = 0; k < steps && *at == 0; k++) {
                        const int a = x + step[k][0], b = y + step[k][1], c = n + step[k][2];
                        if (a >= 0 && a < s->width && b >= 0 && b < s->height && c >= 0 && c <= top)
                            *at = mark[(c * s->height + b) * s->width + a];
                    }
                    again = again || *at != 0;
                }
            }
        }
    }
}

/* Pixels of layer n with the given solidity that are not marked. */
static inline int unmarked(const stage *s, bool solid, int n, const uint8_t *mark)
{
    int count = 0;
    for (int y = 0; y < s->height; y++)
        for (int x = 0; x < s->width; x++)
            count += stage_at(s, x, y, n) == solid && mark[(n * s->height + y) * s->width + x] == 0;
    return count;
}

static inline uint8_t *flood_marks(const stage *s)
{
    uint8_t *mark = calloc((size_t)s->layers * (size_t)s->height * (size_t)s->width, 1);
    assert_non_null(mark);
    return mark;
}

#endif
