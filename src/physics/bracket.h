/* The zero of a function between two points where its signs differ.
 *
 * Regula falsi with the end that stays halved, or scaled by 1 - new / old value of the end that
 * moves (Anderson and Bjorck 1973, from memory): faster than a line at a simple zero, never outside
 * the bracket. Three looks that did not halve the bracket are followed by its middle: four looks a
 * factor of 2 at worst. The caller evaluates and decides when it is enough:
 *
 *     while (...)
 *         fw_bracket_put(&bracket, x = fw_bracket_next(&bracket), value(x));
 */
#ifndef FW_BRACKET_H
#define FW_BRACKET_H

typedef struct fw_bracket {
    double at[2]; /* any two points */
    double
        value[2]; /* value[0] < 0 <= value[1]; scaled, not the function's, at an end that stays */
    int moved;    /* the end that was replaced last: 0, 1, or -1 at the start */
    double wide;  /* what is to be halved; 0 at the start */
    int looks;    /* since it was; 0 at the start */
} fw_bracket;

/* Where to look next: strictly between the ends, or an end when no number lies between. */
double fw_bracket_next(const fw_bracket *bracket);

/* Takes in the value there. */
void fw_bracket_put(fw_bracket *bracket, double at, double value);

#endif
