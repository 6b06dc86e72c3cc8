/* Roots and minima of functions of one variable. */
#ifndef LSTUB_ROOT_H
#define LSTUB_ROOT_H

typedef double lstub__function(double x, const void *context);

/* Root in [a, b], where f changes sign (a zero at an end counts): regula falsi in the Illinois form, falling back on
** bisection. Stops when the bracket is narrower than tol. Without a change of sign: NaN. */
double lstub__root(lstub__function *f, const void *context, double a, double b, double tol);

/* Place of the least value in [a, b] by golden sections, to tol. For f with one minimum there. */
double lstub__minimum(lstub__function *f, const void *context, double a, double b, double tol);

#endif
