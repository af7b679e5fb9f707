#include "physics/separation.h"

double fw_separation_q(double viscosity_mPa_s, double speed_mm_s, double gap_um)
{
    return 12.0 * viscosity_mPa_s * speed_mm_s / (gap_um * gap_um * gap_um);
}
