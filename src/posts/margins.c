#include "posts/margins.h"

#include "physics/strength.h"

#include <math.h>

static double capacity_N(const fw_resin *resin, fw_post_check check, double area_mm2)
{
    if (check == FW_POST_FOOT)
        return fw_strength_adhesion_N(resin->plate_adhesion_MPa, area_mm2);
    return fw_strength_tension_N(resin->tensile_MPa, area_mm2);
}

double fw_margin_of(const fw_resin *resin, fw_post_check check, double area_mm2, double load_N)
{
    return fw_strength_margin(capacity_N(resin, check, area_mm2), load_N);
}

fw_post_margins fw_margins_of(const fw_resin *resin, const fw_post_demand *demand,
                              const fw_post_section *section)
{
    fw_post_margins all = {.least = (double)NAN, .governs = FW_POST_CHECKS};
    for (int check = 0; check < FW_POST_CHECKS; check++) {
        double margin = fw_margin_of(resin, (fw_post_check)check, section->area_mm2[check],
                                     demand->load_N[check]);
        all.margin[check] = margin;
        if (!isnan(margin) && !(margin >= all.least)) {
            all.least = margin;
            all.governs = (fw_post_check)check;
        }
    }
    return all;
}
