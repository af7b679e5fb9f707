#include "physics/separation.h"

#include <math.h>

double fw_separation_q(double viscosity_mPa_s, double speed_mm_s, double gap_um)
{
    return 12.0 * viscosity_mPa_s * speed_mm_s / (gap_um * gap_um * gap_um);
}

double fw_separation_shear_MPa(double viscosity_mPa_s, double speed_mm_s, double gap_um)
{
    /* mPa s * mm/s / um = 1e-3 * 1e-3 / 1e-6 Pa = 1 Pa */
    return viscosity_mPa_s * speed_mm_s / gap_um * 1e-6;
}

double fw_separation_lever(const fw_machine *machine, double x_mm, double y_mm)
{
    const double(*at)[2] = machine->hinge_mm.at;
    const double along_x = at[1][0] - at[0][0], along_y = at[1][1] - at[0][1];
    return (along_x * (y_mm - at[0][1]) - along_y * (x_mm - at[0][0])) / hypot(along_x, along_y);
}

fw_film_plane fw_separation_faster(const fw_machine *machine, double px_mm, double py_mm)
{
    if (machine->mode != FW_MODE_TILT)
        return (fw_film_plane){0, 0, 0};
    const double centre =
        fw_separation_lever(machine, machine->plate_mm[0] / 2, machine->plate_mm[1] / 2);
    const double corner = fw_separation_lever(machine, 0, 0);
    return (fw_film_plane){corner / centre - 1,
                           (fw_separation_lever(machine, px_mm, 0) - corner) / centre,
                           (fw_separation_lever(machine, 0, py_mm) - corner) / centre};
}

void fw_separation_speeds(fw_film_plane faster, double width_px, double height_px, double *least,
                          double *most)
{
    const double across = faster.per_x_px * width_px, down = faster.per_y_px * height_px;
    *least = 1 + faster.at + fmin(across, 0) + fmin(down, 0);
    *most = 1 + faster.at + fmax(across, 0) + fmax(down, 0);
}
