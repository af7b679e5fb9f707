/* Union and difference of intervals, by rebuilding the short list. */
#include "spans.h"

#include <stdio.h>
#include <stdlib.h>

static void append(part_spans *set, double from, double to)
{
    if (from >= to)
        return;
    if (set->count == PART_SPANS) {
        fputs("falsework-part: a row, too many intervals, raise PART_SPANS\n", stderr);
        exit(3);
    }
    set->from[set->count] = from;
    set->to[set->count] = to;
    ++set->count;
}

void part_spans_add(part_spans *set, double from, double to)
{
    part_spans joined;
    int i = 0;
    joined.count = 0;
    if (from >= to)
        return;
    for (; i < set->count && set->to[i] < from; ++i)
        append(&joined, set->from[i], set->to[i]);
    for (; i < set->count && set->from[i] <= to; ++i) {
        from = set->from[i] < from ? set->from[i] : from;
        to = set->to[i] > to ? set->to[i] : to;
    }
    append(&joined, from, to);
    for (; i < set->count; ++i)
        append(&joined, set->from[i], set->to[i]);
    *set = joined;
}

void part_spans_cut(part_spans *set, double from, double to)
{
    part_spans rest;
    rest.count = 0;
    if (from >= to)
        return;
    for (int i = 0; i < set->count; ++i) {
        append(&rest, set->from[i], set->to[i] < from ? set->to[i] : from);
        append(&rest, set->from[i] > to ? set->from[i] : to, set->to[i]);
    }
    *set = rest;
}
