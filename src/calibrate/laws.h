/* Closed forms that stand beside the kernels in the checks: the integral G of u (-lap u = 1) of
 * shapes that are solved by hand, and load laws for what moves on them. Lengths mm, G mm4, forces
 * N, pressures MPa, q MPa/mm2 (separation.h). */
#ifndef FW_CALIBRATE_LAWS_H
#define FW_CALIBRATE_LAWS_H

#define FW_PI 3.14159265358979323846

/* The fluid and speed of the Stefan rows: 0.5 Pa s, 1 mm/s; one atmosphere. */
#define FW_LAW_VISCOSITY 500.0
#define FW_LAW_SPEED 1.0
#define FW_LAW_ATMOSPHERE 0.101325

/* pi R^4 / 8 (Stefan 1874). */
double fw_law_disc(double radius_mm);

/* Rectangle a x b, by the series of the torsion problem, J / 4 (Timoshenko and Goodier 1951, from
 * memory). */
double fw_law_rectangle(double a_mm, double b_mm);

/* Concentric hole, open on its edge: (pi / 8)(R^4 - r^4 - (R^2 - r^2)^2 / ln(R / r)), the annular
 * flow of Bird, Stewart and Lightfoot 1960; sealed: (pi / 8)(R^4 - r^4), derived here. */
double fw_law_ring_vented(double outer_mm, double inner_mm);
double fw_law_ring_sealed(double outer_mm, double inner_mm);

/* F = G q; the context is a double, G. */
double fw_law_straight_N(const void *context, double q);

/* A disc under a cap. Where Pi = P / (q R^2 / 4) < 1 the liquid gives way in a core of radius c,
 * x = (c / R)^2:  Pi = 1 - x + x ln x,  F = P pi R^2 (1 - x)^2 / (2 Pi); derived here from the
 * radial complementarity problem. */
typedef struct fw_law_disc_capped {
    double radius_mm, cap_MPa;
} fw_law_disc_capped;

/* x of Pi; 0 for Pi >= 1. */
double fw_law_core(double pi_ratio);

/* The context is a fw_law_disc_capped. */
double fw_law_disc_capped_N(const void *context, double q);

#endif
