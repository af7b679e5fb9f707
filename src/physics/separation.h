/* From resin and machine to the one number that scales the film equation. */
#ifndef FW_SEPARATION_H
#define FW_SEPARATION_H

/* q = 12 eta v / h^3 in MPa/mm2 from eta in mPa s, v in mm/s and h in um: the source term of
 * -lap s = q (Stefan 1874, Reynolds 1886), so that F = q * integral u (film.h) in N. In these units
 * q = 12 eta v / h^3 with the numbers as they stand: mPa s * mm/s / um^3 = 1e-3 * 1e-3 / 1e-18
 * Pa/m2 = 1e12 Pa/m2 = 1 MPa/mm2.
 *
 * Valid for h far below the narrowest width of the film, inertia small (rho v h / eta << 1), a
 * Newtonian liquid that fills the gap, flat rigid faces. Linear in v: a negative v (approach) gives
 * a negative q, that is pressure in place of suction. gap_um must be > 0. */
double fw_separation_q(double viscosity_mPa_s, double speed_mm_s, double gap_um);

#endif
