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

#include "physics/cards.h"

#include <stdint.h>

/* Cure depth in um of a dose at the window; 0 where the dose does not exceed the critical one. */
double fw_cure_depth_um(double penetration_um, double critical_mJ_cm2, double dose_mJ_cm2);

/* Dose at the window in mJ/cm2 that just gels at a depth: E = Ec exp(depth / Dp). */
double fw_cure_dose(double penetration_um, double critical_mJ_cm2, double depth_um);

/* The smallest grey (1 .. full) that joins a layer to the one before: E0 (g / full) exp(-t / Dp) >=
 * joint_ratio Ec, with a linear grey response. INT32_MAX when even full grey does not. */
int32_t fw_cure_solid_least(const fw_resin *resin, double layer_um, int32_t full);

/* The smallest grey (1 .. full) with grey / full >= intent_level (0 < intent_level <= 1; full =
 * 2^depth - 1), compared
 * as doubles exactly as written here. */
int32_t fw_cure_intended_least(double intent_level, int32_t full);

/* How far a plate-facing face grows toward the plate under an unending wall of equal layers, um:
 *
 *     D = Dp [ln(E0 / Ec) - ln(1 - exp(-t / Dp))] - t,  not below 0
 *
 * from the sum over layers of E0 exp(-d / Dp) (geometric series). An upper bound: oxygen and
 * diffusion forget sub-critical dose between layers. */
double fw_cure_print_through_um(const fw_resin *resin, double layer_um);

#endif
