/* Sets of x positions on one line: sorted, disjoint, closed intervals in mm. */
#ifndef PART_SPANS_H
#define PART_SPANS_H

enum { PART_SPANS = 16 };

typedef struct part_spans {
    int count;
    double from[PART_SPANS], to[PART_SPANS]; /* mm, from < to, ascending, disjoint */
} part_spans;

/* Adds [from, to] to the set. More than PART_SPANS intervals end the program: the parts are fixed
 * tables, so that is a mistake in a table and no input can cause it. */
void part_spans_add(part_spans *set, double from, double to);

/* Takes [from, to] out of the set. */
void part_spans_cut(part_spans *set, double from, double to);

#endif
