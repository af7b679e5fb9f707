/* What light does to one layer: the working curve, the grey from which a pixel is solid, and how
 * far a plate-facing face grows through.
 *
 * Working curve (Jacobs 1992): Cd = Dp ln(E / Ec), dose at depth z: E(z) = E0 exp(-z / Dp).
 * Dp penetration depth, Ec critical dose, one wavelength, no oxygen, no diffusion. Depths um, doses
 * mJ/cm2. Between laboratories Dp of one resin differs up to 7 times and Ec up to 70 times
 * (interlaboratory study, PMC10986335), so the card's values are worth no more than their source.
 */
#ifndef FW_CURE_H
#define FW_CURE_H

#include "fault/fault.h"
#include "physics/cards.h"

#include <stdint.h>

/* Cure depth in um of a dose at the window; 0 where the dose does not exceed the critical one. */
double fw_cure_depth_um(double penetration_um, double critical_mJ_cm2, double dose_mJ_cm2);

/* Dose at the window in mJ/cm2 that just gels at a depth: E = Ec exp(depth / Dp). */
double fw_cure_dose(double penetration_um, double critical_mJ_cm2, double depth_um);

/* Dp and Ec of the working curve through two measured depths, {dose mJ/cm2, depth um}:
 * Dp = (Cd2 - Cd1) / ln(E2 / E1), Ec = E1 exp(-Cd1 / Dp). FW_INPUT unless doses and depths are
 * above 0 and the larger dose cures deeper. Two points have no error to show; a broad source bends
 * the curve, and then the fit holds between them only. */
fw_status fw_cure_fit(const double at[2][2], double *penetration_um, double *critical_mJ_cm2,
                      fw_fault *fault);

/* Whether points are a grey response: from {0, 0} to {1, 1}, the first of each pair (grey as a
 * share of full) rising, the second (share of the full dose) never falling. */
bool fw_cure_is_response(const fw_points *points);

/* Share of the full dose that a grey (share of full, 0 .. 1) lets through: linear between the
 * points of a response. NULL or no points: the grey itself, to the bit. */
double fw_cure_response(const fw_points *response, double grey);

/* The smallest grey (1 .. full) that joins a layer to the one before: E0 r(g / full) exp(-t / Dp)
 * >= joint_ratio Ec, r the response. INT32_MAX when even full grey does not. */
int32_t fw_cure_solid_least(const fw_resin *resin, const fw_points *response, double layer_um,
                            int32_t full);

/* The smallest grey (1 .. full) with grey / full >= intent_level (0 < intent_level <= 1; full =
 * 2^depth - 1), compared
 * as doubles exactly as written here. */
int32_t fw_cure_intended_least(double intent_level, int32_t full);

/* How far a plate-facing face grows toward the plate under an unending wall of equal layers, um:
 *
 *     D = Dp [ln(E0 / Ec) - ln(1 - exp(-t / Dp))] - t,  not below 0
 *
 * from the sum over layers of E0 exp(-d / Dp) (geometric series; derived here). An upper bound:
 * oxygen and diffusion forget sub-critical dose between layers. It is for resin that nothing
 * shades and one Dp in solid and liquid; n layers in place of all come within r^n of the dose, so
 * within -Dp ln(1 - r^n) of D, r = exp(-t / Dp): 10 layers of t = Dp / 3 miss 0.036 Dp. With dark
 * or grey layers above, sum their shares (fw_cure_column). */
double fw_cure_print_through_um(const fw_resin *resin, double layer_um);

/* Dose in mJ/cm2 after `layers` equal exposures (INFINITY: all) at a point that lies depth um from
 * the window in the first: E0 exp(-depth / Dp) (1 - r^layers) / (1 - r). Closed form of the below.
 */
double fw_cure_dose_after(const fw_resin *resin, double layer_um, double depth_um, double layers);

/* The dose at one point from layer to layer in print order, whatever each layer shows there. */
typedef struct fw_cure_column {
    double dose_mJ_cm2; /* so far */
    double light;       /* dose that a fully lit layer would add next */
} fw_cure_column;

/* A point that lies depth um from the window in the layer that comes next; no dose yet. */
fw_cure_column fw_cure_column_begin(const fw_resin *resin, double depth_um);

/* One layer: share 0 .. 1 of the full dose at its window face (fw_cure_response of its grey),
 * through = exp(-t / Dp): one multiplication moves the point a layer away. Dp is the same in solid
 * and liquid, and what was dark lets through as much as what was lit. */
void fw_cure_column_add(fw_cure_column *column, double share, double through);

/* A green property (tensile strength, modulus) at a dose, from what was measured: pairs {dose
 * mJ/cm2, value}, doses rising, all above Ec. Linear in ln(E / Ec) between the pairs; the largest
 * dose's value above, never more; from the smallest measured dose down to 0 at Ec, where the gel
 * has no strength by definition (Jacobs 1992, from memory), and 0 below. A single pair has no slope
 * to show: its value at any dose. Two points in a network that cures on by its own heat are a rough
 * guide. */
double fw_cure_green(const fw_points *measured, double critical_mJ_cm2, double dose_mJ_cm2);

#endif
