#include "check/setup.h"

#include "physics/cure.h"
#include "physics/separation.h"
#include "physics/strength.h"

#include <math.h>

/* A load is not worth a solve below a hundredth of what the smallest tip can carry, nor above a
 * hundredth of the limits. Unlike a share of "the largest load so far" this depends on the job
 * alone, so that the order in which layers are solved cannot change a byte. */
static double unsolved_below(const fw_job *job)
{
    const double tip_mm = job->has_rules ? job->rules.tip_mm[0] : 0.3;
    double least = fw_strength_tension_N(job->resin.tensile_MPa, acos(-1.0) / 4 * tip_mm * tip_mm);
    if (job->machine.drive_limit_N > 0)
        least = fmin(least, job->machine.drive_limit_N);
    if (job->max_peel_N > 0)
        least = fmin(least, job->max_peel_N);
    return least / 100;
}

static void set_law(fw_setup *setup, const fw_machine *machine)
{
    setup->traction =
        (fw_traction){.law = machine->mode == FW_MODE_FILM ? FW_TRACTION_FILM : FW_TRACTION_TABLE,
                      .area_MPa = machine->area_kPa / 1000,
                      .rim_N_mm = machine->rim_N_mm,
                      .front_mm = machine->front_mm,
                      .cavity_MPa = machine->cap_kPa / 1000,
                      .table = &machine->table_mm2_N};
    setup->q = setup->q_range[0] = setup->q_range[1] = 1;
    setup->cap_MPa = INFINITY;
}

/* Shear goes with 1 / h: q stands for that here. */
static void set_shear(fw_setup *setup, const fw_resin *resin, const fw_machine *machine)
{
    const double angle = machine->slide_deg * acos(-1.0) / 180;
    setup->traction =
        (fw_traction){.law = FW_TRACTION_SHEAR,
                      .area_MPa = fw_separation_shear_MPa(resin->viscosity_mPa_s,
                                                          machine->speed_mm_s, machine->gap_um)};
    setup->slide[0] = cos(angle);
    setup->slide[1] = sin(angle);
    setup->q = 1;
    for (int end = 0; end < 2; end++)
        setup->q_range[end] = machine->gap_um / machine->gap_range_um[end];
    setup->cap_MPa = INFINITY;
}

static void set_liquid(fw_setup *setup, const fw_resin *resin, const fw_machine *machine)
{
    setup->q = fw_separation_q(resin->viscosity_mPa_s, machine->speed_mm_s, machine->gap_um);
    for (int end = 0; end < 2; end++)
        setup->q_range[end] = fw_separation_q(resin->viscosity_mPa_s, machine->speed_mm_s,
                                              machine->gap_range_um[end]);
    setup->faster = fw_separation_faster(machine, setup->px_mm, setup->py_mm);
    setup->cap_MPa = machine->cap_kPa / 1000;
}

static void set_loads(fw_setup *setup, const fw_job *job)
{
    const fw_machine *machine = &job->machine;
    if (machine->mode == FW_MODE_FILM || machine->mode == FW_MODE_MEASURED)
        set_law(setup, machine);
    else if (machine->mode == FW_MODE_SLIDE)
        set_shear(setup, &job->resin, machine);
    else
        set_liquid(setup, &job->resin, machine);
    setup->unsolved_N = unsolved_below(job);
}

fw_setup fw_setup_make(const fw_job *job, int32_t width, int32_t height, int32_t layers,
                       int32_t lift, int32_t full)
{
    fw_setup setup = {.job = job,
                      .width = width,
                      .height = height,
                      .layers = layers,
                      .lift = lift,
                      .full = full,
                      .px_mm = job->pixel_um[0] / 1000,
                      .py_mm = job->pixel_um[1] / 1000,
                      .t_mm = job->layer_um / 1000,
                      .intended_least = fw_cure_intended_least(job->intent_level, full),
                      .reach_mm = INFINITY,
                      .vent_mm = job->vent_mm,
                      .smallest_tip_mm = job->has_rules ? job->rules.tip_mm[0] : 0,
                      .loads = job->has_resin && job->has_machine};
    setup.solid_least = setup.intended_least;
    setup.vent_px[0] = job->vent_mm / 2 / setup.px_mm * (1 - 1e-9);
    setup.vent_px[1] = job->vent_mm / 2 / setup.py_mm * (1 - 1e-9);
    if (job->has_resin) {
        const double degree = acos(-1.0) / 180;
        setup.solid_least =
            fw_cure_solid_least(&job->resin, &job->machine.grey, job->layer_um, full);
        setup.credit_mm = setup.t_mm / tan(job->resin.angle_deg * degree);
        setup.reach_mm = job->resin.reach_mm;
    }
    if (setup.loads)
        set_loads(&setup, job);
    return setup;
}

fw_status fw_setup_check(const fw_setup *setup, fw_fault *fault)
{
    double least, most;
    fw_separation_speeds(setup->faster, setup->width, setup->height, &least, &most);
    if (!setup->loads || least > 0)
        return FW_OK;
    return fw_fault_set(
        fault, FW_INPUT,
        "separation.hinge_mm: the hinge line crosses the image of %g x %g mm, or the "
        "image lies beyond it; move it beside the image, on the plate's far side",
        setup->width * setup->px_mm, setup->height * setup->py_mm);
}

double fw_setup_x(const fw_setup *setup, double x)
{
    return (x + 0.5) * setup->px_mm;
}

double fw_setup_y(const fw_setup *setup, double y)
{
    return (y + 0.5) * setup->py_mm;
}
