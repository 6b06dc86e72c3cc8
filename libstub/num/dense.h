/* Small dense complex systems, in place, on the caller's memory. */
#ifndef LSTUB_DENSE_H
#define LSTUB_DENSE_H

#include "num/cplx.h"

/*
** Solves A X = B for `rhs` right-hand sides by LU with partial pivoting: A (n x n, row stride sa) is destroyed, B
** (n x rhs, row stride sb) becomes X. Returns 0, or -1 where A is singular to the last bit or holds a NaN.
*/
int lstub__zsolve(cplx *a, int n, int sa, cplx *b, int rhs, int sb);

/* The same for real numbers. */
int lstub__rsolve(double *a, int n, int sa, double *b, int rhs, int sb);

#endif
