/* Surface of copper: what a current in its skin meets. */
#ifndef LSTUB_CONDUCTOR_H
#define LSTUB_CONDUCTOR_H

#include "material/material.h"

/*
** Impedance of the surface of thick copper, ohm per square, at f > 0 Hz; `taken` comes from lstub__conductor_take.
**
** Smooth: Zs = (1 + j) Rs, Rs = 1/(conductivity depth). Rough: Zs K, with the K below of X = (1 + j) times a length over
** the skin depth, that is the root of jw times a constant. Both K are analytic for Re jw > 0, and their Zs K is positive
** real: causal and passive. Re(Zs K)/Rs is the published factor of the law, exactly; the rest follows.
**   HAMMERSTAD  K = 1 + (2/pi) [atan X + ln((1 + X)/sqrt(1 + X^2))], X = sqrt(0.7) (1 + j) rms/depth
**               (derived: the factor's atan is an integral over simple relaxations, the partner of each is known)
**   SPHERES     K = 1 + 84 (pi/36) X/(1 + X), X = (1 + j) r/depth, r = 0.06 Rz, Rz = 2 sqrt(3) rms
**               (the complex form is Bracken's, DesignCon 2012, from memory; derived again)
*/
cplx lstub__surface_impedance(const lstub_conductor *taken, double f);
double lstub__skin_depth(double conductivity, double f);

/* The parts of it: smooth impedance, and K - 1. */
cplx lstub__roughness(const lstub_conductor *taken, double depth);

#endif
