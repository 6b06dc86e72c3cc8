/*
** One response over frequency on the multiples of a step from 0 to f_max, whatever frequencies it is given at: evenly
** spaced ones keep their step, others get 4 n steps. Points on the grid are taken as they are. Between points: cubics
** through four of them; below the first: even real, odd imaginary part, through the first point and the first one at
** twice its frequency or more; both of the response without its mean delay, which hardly turns then.
*/
#ifndef LSTUB_SPECTRUM_H
#define LSTUB_SPECTRUM_H

#include "base/base.h"
#include "num/cplx.h"

typedef struct lstub__grid {
    const double *freq;
    size_t        n, count;    /* count: steps to f_max */
    double        step;
} lstub__grid;

/* Checks the frequencies and finds the step. LSTUB_W_RANGE: the first is above f_max/20. */
int32_t lstub__grid_make(lstub__grid *grid, const double *freq, size_t n, lstub_error *err);

typedef struct lstub__spectrum {
    const lstub__grid *grid;
    const double      *h;      /* first value */
    size_t             stride; /* doubles from value to value */
    double             delay;  /* s */
    double             re0, re2, im1, im3;     /* below the first frequency */
    size_t             at;     /* interval looked at last */
} lstub__spectrum;

/* Of S[to, from] of p ports. Checks its values. */
int32_t lstub__spectrum_make(lstub__spectrum *x, const lstub__grid *grid, const double *s, int32_t p, int32_t to, int32_t from,
                             lstub_error *err);
/* Value at k steps; cheapest with k rising. Real at 0. */
cplx lstub__spectrum_at(lstub__spectrum *x, size_t k);

/* A factor at k steps. */
typedef double lstub__weight(const void *context, size_t k);

/* sum[i] = Re of the sum over k = 1 .. count of weight(k) X(k) e^(j 2 pi k step t[i]), divided by j k where `integrated`. */
void lstub__spectrum_sum(lstub__spectrum *x, lstub__weight *weight, const void *context, int integrated, const double *t, size_t m,
                         double *sum);

#endif
