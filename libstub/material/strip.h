/* Cross-sections of traces: what their shape alone decides. Lengths in any unit, all alike. */
#ifndef LSTUB_STRIP_H
#define LSTUB_STRIP_H

/* A trace in a vacuum as far as its inductance goes, and how that grows as the metal recedes (1/mu0) dL'/dn, 1/m. */
typedef struct lstub__strip {
    double inductance;      /* L'/mu0                                                                */
    double share;           /* stripline: of the energy below the strip                              */
    double planes, metal;   /* incremental inductance of the planes' and of the strip's surfaces; without thickness 0 */
} lstub__strip;

/*
** Stripline of width w and thickness t, h1 above the plane below and h2 under the plane above.
**
** t = 0: exact at any height (derived). With b = h1 + h2, p0 = h2/b and the right half of the cross-section mapped to a rectangle
** of sides 1 and T, plates 0 and 1 at opposite sides of length 1, x is the potential of a line source at p0 on the one
** plate between two walls, the other plate a mirror:
**   x(p)/b = (2/pi) sum over n of sin(n pi p0) sin(n pi p)/(n sinh(n pi T))
** along the strip, which turns at its edge: w/2 = max over p of x. Then C' = 2 eps/T, L' = mu0 T/2. Summed over images; for
** h1 = h2 it is Cohn's form (1954).
** t > 0: a thin strip in the remaining height, wider by what Wheeler's form (1978, from memory) says for the centred
** strips of both heights, weighted by the other height squared (a choice made on boundary-element solutions).
** share: that of the charge below, p at the edge, moved by 0.28 towards p0 (fitted to spectral solutions, within 0.02).
*/
void lstub__stripline(double w, double t, double h1, double h2, lstub__strip *out);

/* Impedance of a microstrip in a vacuum (Hammerstad, Jensen 1980), ohm, u = w/h; and with it the same numbers. */
double lstub__microstrip_air(double u);
void lstub__microstrip(double w, double t, double h, lstub__strip *out);

/* Static effective Dk on a substrate of this contrast of Dk (>= 1) to what lies above, and the width over height it hangs on. */
double lstub__microstrip_dk(double u, double t_over_h, double contrast, double *u_effective);

/*
** Dispersion: what part of the contrast's excess over the static effective Dk is reached, P/(1 + P) (Kirschning, Jansen,
** Electronics Letters 18(6), 1982); and the factor on the static impedance (Jansen, Kirschning, AEU 37, 1983, power and
** current). x = f h sqrt(Dk above), in Hz m.
*/
double lstub__microstrip_rise(double u, double contrast, double x);
double lstub__microstrip_factor(double u, double contrast, double dk, double dk_at_f, double x);

#endif
