/* Networks of one frequency, and what the batch functions share. Matrices are row by row, p x p. */
#ifndef LSTUB__NETWORK_H
#define LSTUB__NETWORK_H

#include "base/base.h"
#include "num/cplx.h"

#define LSTUB__PORTS2 (LSTUB_PORTS_MAX * LSTUB_PORTS_MAX)

/*
** X with den X = num (left), or X den = num (right); den is m x m, num m x count or count x m, count <= 2 m. size[m m]:
** how large the terms were that den was summed from; null: den itself. Returns the condition, the error of X over that
** of the terms (Skeel's number, deaf to scales): infinite where den is singular. x must not be num or den.
*/
double lstub__left_divide(const cplx *den, const double *size, int m, const cplx *num, int count, cplx *x);
double lstub__right_divide(const cplx *den, const double *size, int m, const cplx *num, int count, cplx *x);

/* The functions of the header for one frequency. They return the condition; in may be out. */
double lstub__net_renormalise(const cplx *s, int p, const cplx *z_from, const cplx *z_to, cplx *out);
double lstub__net_convert(const cplx *in, int p, int from, int to, const double *z, cplx *out);
double lstub__net_cascade(const cplx *a, const cplx *b, int p, cplx *out);
double lstub__net_deembed(const cplx *measured, const cplx *left, const cplx *right, int p, cplx *out);   /* left, right: or null */

/* What becomes of an item with that condition: fine, LSTUB_W_RANGE, or LSTUB_E_NONE; `what` cannot be inverted. */
int32_t lstub__net_judge(double condition, const char *what, lstub_error *err);

/* 1 <= p <= LSTUB_PORTS_MAX; also even. */
int32_t lstub__net_ports(int32_t p, int even, lstub_error *err);
/* Real references of p ports. */
int32_t lstub__net_references(const double *z, int32_t p, const char *field, lstub_error *err);
/* Frequencies 0 to 1e12 Hz, rising. */
int32_t lstub__net_frequencies(const double *freq, size_t n, lstub_error *err);
/* Matrix i of an array, if there is no NaN and no infinity in it. */
int32_t lstub__net_load(const double *s, size_t i, int32_t p, const char *field, cplx *out, lstub_error *err);
void    lstub__net_store(const cplx *s, int32_t p, double *out);

/* One item: its `width` numbers into out, after everything has been read. */
typedef int32_t lstub__net_item(const void *context, size_t i, double *out, lstub_error *err);
/* All items; those that fail, or come out infinite, hold NaN. */
int32_t lstub__net_each(lstub__net_item *item, const void *context, size_t n, size_t width, double *out, int32_t *status, lstub_error *err);

#endif
