#include "physics/bracket.h"

#include <math.h>

double fw_bracket_next(const fw_bracket *bracket)
{
    const double *at = bracket->at, *value = bracket->value;
    const double next = at[0] - value[0] * (at[1] - at[0]) / (value[1] - value[0]);
    if (bracket->looks < 3 && next > fmin(at[0], at[1]) && next < fmax(at[0], at[1]))
        return next;
    return at[0] + (at[1] - at[0]) / 2;
}

void fw_bracket_put(fw_bracket *bracket, double at, double value)
{
    const int end = value < 0 ? 0 : 1;
    if (bracket->wide == 0)
        bracket->wide = fabs(bracket->at[1] - bracket->at[0]);
    if (bracket->moved == end) {
        const double scale = 1 - value / bracket->value[end];
        bracket->value[1 - end] *= scale > 0 ? scale : 0.5;
    }
    bracket->at[end] = at;
    bracket->value[end] = value;
    bracket->moved = end;
    bracket->looks++;
    const double wide = fabs(bracket->at[1] - bracket->at[0]);
    if (wide <= bracket->wide / 2) {
        bracket->wide = wide;
        bracket->looks = 0;
    }
}
