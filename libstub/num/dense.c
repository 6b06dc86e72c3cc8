#include "num/dense.h"

#include <string.h>

static void swap_rows(cplx *a, cplx *b, int from, int to)
{
    int k;

    for (k = from; k < to; k++) { cplx t = a[k]; a[k] = b[k]; b[k] = t; }
}

int lstub__zsolve(cplx *a, int n, int sa, cplx *b, int rhs, int sb)
{
    int i, j, k;

    for (k = 0; k < n; k++) {
        int pivot = k;
        double best = cplx_norm(a[k * sa + k]);
        cplx inverse;

        for (i = k + 1; i < n; i++) {
            double size = cplx_norm(a[i * sa + k]);
            if (size > best) { best = size; pivot = i; }
        }
        if (!(best > 0.0)) return -1;
        if (pivot != k) {
            swap_rows(a + k * sa, a + pivot * sa, k, n);
            swap_rows(b + k * sb, b + pivot * sb, 0, rhs);
        }
        inverse = cplx_inv(a[k * sa + k]);
        a[k * sa + k] = inverse;                /* kept for the way back */
        for (i = k + 1; i < n; i++) {
            cplx f = cplx_mul(a[i * sa + k], inverse);
            for (j = k + 1; j < n; j++) a[i * sa + j] = cplx_fms(a[i * sa + j], f, a[k * sa + j]);
            for (j = 0; j < rhs; j++) b[i * sb + j] = cplx_fms(b[i * sb + j], f, b[k * sb + j]);
        }
    }
    for (k = n - 1; k >= 0; k--) {
        for (j = 0; j < rhs; j++) {
            cplx x = b[k * sb + j];
            for (i = k + 1; i < n; i++) x = cplx_fms(x, a[k * sa + i], b[i * sb + j]);
            b[k * sb + j] = cplx_mul(x, a[k * sa + k]);
        }
    }
    return 0;
}

int lstub__rsolve(double *a, int n, int sa, double *b, int rhs, int sb)
{
    int i, j, k;

    for (k = 0; k < n; k++) {
        int pivot = k;

        for (i = k + 1; i < n; i++) if (fabs(a[i * sa + k]) > fabs(a[pivot * sa + k])) pivot = i;
        if (!(fabs(a[pivot * sa + k]) > 0.0)) return -1;
        if (pivot != k) {
            for (j = k; j < n; j++) { double t = a[k * sa + j]; a[k * sa + j] = a[pivot * sa + j]; a[pivot * sa + j] = t; }
            for (j = 0; j < rhs; j++) { double t = b[k * sb + j]; b[k * sb + j] = b[pivot * sb + j]; b[pivot * sb + j] = t; }
        }
        for (i = k + 1; i < n; i++) {
            double f = a[i * sa + k] / a[k * sa + k];
            for (j = k + 1; j < n; j++) a[i * sa + j] -= f * a[k * sa + j];
            for (j = 0; j < rhs; j++) b[i * sb + j] -= f * b[k * sb + j];
        }
    }
    for (k = n - 1; k >= 0; k--) {
        for (j = 0; j < rhs; j++) {
            for (i = k + 1; i < n; i++) b[k * sb + j] -= a[k * sa + i] * b[i * sb + j];
            b[k * sb + j] /= a[k * sa + k];
        }
    }
    return 0;
}

#define SMALL 1e-5      /* a pivot below this share of what stood there first is not divided by */

/* Real and imaginary parts apart: loops that a compiler can make two or four of. */
typedef struct split {
    double mr[LSTUB__GRAM_N][LSTUB__GRAM_N], mi[LSTUB__GRAM_N][LSTUB__GRAM_N];
    double rr[LSTUB__GRAM_N][LSTUB__GRAM_WIDE], ri[LSTUB__GRAM_N][LSTUB__GRAM_WIDE];
    double gr[LSTUB__GRAM_WIDE][LSTUB__GRAM_WIDE], gi[LSTUB__GRAM_WIDE][LSTUB__GRAM_WIDE];
} split;

static void subtract(double *restrict to_r, double *restrict to_i, cplx f, const double *restrict row_r, const double *restrict row_i, int from, int to)
{
    int j;

    for (j = from; j < to; j++) {
        to_r[j] -= f.re * row_r[j] - f.im * row_i[j];
        to_i[j] -= f.re * row_i[j] + f.im * row_r[j];
    }
}

/* 0 where a pivot is small. */
static int eliminate(split *s, int n, int wide)
{
    double first[LSTUB__GRAM_N];
    int i, k;

    for (k = 0; k < n; k++) first[k] = s->mr[k][k] * s->mr[k][k] + s->mi[k][k] * s->mi[k][k];
    for (k = 0; k < n; k++) {
        cplx pivot = cplx_of(s->mr[k][k], s->mi[k][k]), inverse;

        if (!(cplx_norm(pivot) > SMALL * SMALL * first[k])) return 0;
        inverse = cplx_inv(pivot);
        for (i = k + 1; i < n; i++) {
            cplx f = cplx_mul(cplx_of(s->mr[k][i], s->mi[k][i]), inverse);
            subtract(s->mr[i], s->mi[i], f, s->mr[k], s->mi[k], i, n);
            subtract(s->rr[i], s->ri[i], f, s->rr[k], s->ri[k], 0, wide);
        }
        for (i = 0; i < wide; i++) {
            cplx f = cplx_neg(cplx_mul(cplx_of(s->rr[k][i], s->ri[k][i]), inverse));
            subtract(s->gr[i], s->gi[i], f, s->rr[k], s->ri[k], i, wide);
        }
    }
    return 1;
}

static int with_pivots(cplx *m, int n, cplx *r, int wide, cplx *g)
{
    cplx x[LSTUB__GRAM_N * LSTUB__GRAM_WIDE];
    int i, j, k;

    for (i = 0; i < n; i++) for (j = 0; j < i; j++) m[i * n + j] = m[j * n + i];
    memcpy(x, r, (size_t)(n * wide) * sizeof x[0]);
    if (lstub__zsolve(m, n, n, x, wide, wide) != 0) return -1;
    for (i = 0; i < wide; i++)
        for (j = i; j < wide; j++) {
            cplx sum = cplx_of(0.0, 0.0);
            for (k = 0; k < n; k++) sum = cplx_fma(sum, r[k * wide + i], x[k * wide + j]);
            g[i * wide + j] = g[j * wide + i] = sum;
        }
    return 0;
}

int lstub__zgram(cplx *m, int n, cplx *r, int wide, cplx *g)
{
    split s;
    int i, j;

    for (i = 0; i < n; i++) {
        for (j = i; j < n; j++) { s.mr[i][j] = m[i * n + j].re; s.mi[i][j] = m[i * n + j].im; }
        for (j = 0; j < wide; j++) { s.rr[i][j] = r[i * wide + j].re; s.ri[i][j] = r[i * wide + j].im; }
    }
    for (i = 0; i < wide; i++) for (j = i; j < wide; j++) s.gr[i][j] = s.gi[i][j] = 0.0;
    if (!eliminate(&s, n, wide)) return with_pivots(m, n, r, wide, g);
    for (i = 0; i < wide; i++) for (j = i; j < wide; j++) g[i * wide + j] = g[j * wide + i] = cplx_of(s.gr[i][j], s.gi[i][j]);
    return 0;
}
