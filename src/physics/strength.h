/* What a green post can carry along its axis, before it breaks or lets go of the plate.
 *
 * Forces N, areas mm2, strengths MPa = N/mm2. Uniform stress over the section: valid for a pull
 * through the section's centre; bending is not in it.
 */
#ifndef FW_STRENGTH_H
#define FW_STRENGTH_H

/* Tension capacity of a horizontal section (tip, neck or shaft): N = sigma A, sigma the green
 * tensile strength. */
double fw_strength_tension_N(double tensile_MPa, double area_mm2);

/* What the plate holds of a foot that is pulled straight off: N = adhesion A. An average over the
 * foot: peeling from an edge, as on a soft plate, is not in it. */
double fw_strength_adhesion_N(double adhesion_MPa, double area_mm2);

/* capacity / demand; NAN where nothing is demanded. 1 is failure. */
double fw_strength_margin(double capacity_N, double demand_N);

#endif
