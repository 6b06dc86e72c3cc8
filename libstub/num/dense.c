#include "num/dense.h"

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
