/* Small dense complex systems, in place, on the caller's memory. */
#ifndef LSTUB_DENSE_H
#define LSTUB_DENSE_H

#include "num/cplx.h"

/*
** Solves A X = B for `rhs` right-hand sides by LU with partial pivoting: A (n x n, row stride sa) is destroyed, B
** (n x rhs, row stride sb) becomes X. Returns 0, or -1 where A is singular to the last bit or holds a NaN.
*/
int lstub__zsolve(cplx *a, int n, int sa, cplx *b, int rhs, int sb);

/*
** g = r' m^-1 r for a symmetric m (n x n, its upper half is read) and columns r (n x wide): g (wide x wide) symmetric. m and r are
** destroyed. Elimination without pivots, half the work; with them where one is small. n and wide as below at most.
** Returns 0, or -1 as lstub__zsolve.
*/
#define LSTUB__GRAM_N    26
#define LSTUB__GRAM_WIDE 60
int lstub__zgram(cplx *m, int n, cplx *r, int wide, cplx *g);

/* The same as lstub__zsolve for real numbers. */
int lstub__rsolve(double *a, int n, int sa, double *b, int rhs, int sb);

#endif
