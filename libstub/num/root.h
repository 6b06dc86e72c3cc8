/* Roots and minima of functions of one variable. */
#ifndef LSTUB_ROOT_H
#define LSTUB_ROOT_H

typedef double lstub__function(double x, const void *context);

/*
** Narrows [*a, *b], where f changes sign, until it is no wider than tol: regula falsi in the Illinois form, with
** bisection where that is slow. A jump through zero counts as a root. 0 and nothing touched without a change of sign.
*/
int lstub__bracket(lstub__function *f, const void *context, double *a, double *b, double tol);

/* Middle of the narrowed bracket, or the end where f is exactly 0; NaN without a change of sign. */
double lstub__root(lstub__function *f, const void *context, double a, double b, double tol);

/* Place of the least value in [a, b], to 3 tol, by parabolas through three points and golden sections (Brent 1973). For
** f with one minimum there. */
double lstub__minimum(lstub__function *f, const void *context, double a, double b, double tol);

/* The same for x > 0 to 1e-10 x: then the zero of the central difference over 1e-6 x, which rounding blurs far less. */
double lstub__dip(lstub__function *f, const void *context, double a, double b);

/* Electrical length of an open stub with an end load at its zero of reactance number n = 1, 2 ...: the root of
** cot t = q t between (n-1) pi and (n-1/2) pi, q >= 0. */
double lstub__open_stub_angle(double q, int n);

#endif
