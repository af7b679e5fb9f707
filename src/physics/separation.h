/* From resin and machine to the one number that scales the film equation. */
#ifndef FW_SEPARATION_H
#define FW_SEPARATION_H

#include "physics/cards.h"
#include "physics/film.h"

/* q = 12 eta v / h^3 in MPa/mm2 from eta in mPa s, v in mm/s and h in um: the source term of
 * -lap s = q (Stefan 1874, Reynolds 1886), so that F = q * integral u (film.h) in N. In these units
 * q = 12 eta v / h^3 with the numbers as they stand: mPa s * mm/s / um^3 = 1e-3 * 1e-3 / 1e-18
 * Pa/m2 = 1e12 Pa/m2 = 1 MPa/mm2.
 *
 * Valid for h far below the narrowest width of the film, inertia small (rho v h / eta << 1), a
 * Newtonian liquid that fills the gap, flat rigid faces. Linear in v: a negative v (approach) gives
 * a negative q, that is pressure in place of suction. gap_um must be > 0. */
double fw_separation_q(double viscosity_mPa_s, double speed_mm_s, double gap_um);

/* Shear of the film under a window that slides: eta v / h in MPa (Couette; uniform film, Newtonian,
 * edges left out, so h far below the width). */
double fw_separation_shear_MPa(double viscosity_mPa_s, double speed_mm_s, double gap_um);

/* Signed distance in mm of (x, y) mm from the hinge line, positive on the left of the way from its
 * first point to its second. hinge_mm must be two different points. */
double fw_separation_lever(const fw_machine *machine, double x_mm, double y_mm);

/* How the speed of a plate that turns as a rigid body differs over an image of px_mm by py_mm
 * pixels from speed_mm_s at the plate's centre: 1 + faster = lever / lever of the centre, at the
 * corner of pixel (0, 0) and onwards. Zero for a straight pull. The gap is taken as even: the film
 * parts before the plate has turned by much. */
fw_film_plane fw_separation_faster(const fw_machine *machine, double px_mm, double py_mm);

/* The least and the largest 1 + faster over the corners of width x height px. */
void fw_separation_speeds(fw_film_plane faster, double width_px, double height_px, double *least,
                          double *most);

#endif
