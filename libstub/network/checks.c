/* Whether a network can be passive and is reciprocal. */
#include "network/network.h"

#include <math.h>

#define SWEEPS     40
#define ORTHOGONAL 1e-14   /* cosine between columns; what is left of it costs less of a length than rounding */

/* Columns j and k turned until they are orthogonal; 0 where they were. */
static int rotate(cplx *s, int p, int j, int k)
{
    double jj = 0.0, kk = 0.0;
    cplx jk = cplx_of(0.0, 0.0);
    for (int i = 0; i < p; i++) {
        cplx a = s[i * p + j], b = s[i * p + k];
        jj += cplx_norm(a);
        kk += cplx_norm(b);
        jk = cplx_fma(jk, cplx_conj(a), b);
    }
    double g = cplx_abs(jk);
    if (!(g > ORTHOGONAL * sqrt(jj) * sqrt(kk)) || g == 0.0)
        return 0;
    double zeta = (kk - jj) / (2.0 * g);
    double t = (zeta < 0.0 ? -1.0 : 1.0) / (fabs(zeta) + hypot(1.0, zeta)), c = 1.0 / hypot(1.0, t);
    cplx back = cplx_scale(cplx_conj(jk), 1.0 / g);
    for (int i = 0; i < p; i++) {
        cplx a = s[i * p + j], b = cplx_mul(s[i * p + k], back);
        s[i * p + j] = cplx_scale(cplx_sub(a, cplx_scale(b, t)), c);
        s[i * p + k] = cplx_scale(cplx_add(cplx_scale(a, t), b), c);
    }
    return 1;
}

/* Largest singular value by one-sided Jacobi rotations (Hestenes, J. SIAM 6, 1958); s is destroyed. */
static double largest_singular(cplx *s, int p)
{
    double largest = 0.0;
    for (int sweep = 0, turned = 1; turned && sweep < SWEEPS; sweep++) {
        turned = 0;
        for (int j = 0; j < p; j++)
            for (int k = j + 1; k < p; k++)
                turned |= rotate(s, p, j, k);
    }
    for (int j = 0; j < p; j++) {
        double sum = 0.0;
        for (int i = 0; i < p; i++)
            sum += cplx_norm(s[i * p + j]);
        largest = fmax(largest, sqrt(sum));
    }
    return largest;
}

typedef struct check {
    const double *s;
    int32_t       p;
} check;

static int32_t passivity_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const check *x = context;
    cplx s[LSTUB__PORTS2];
    int32_t status = lstub__net_load(x->s, i, x->p, "s", s, err);
    if (status == LSTUB_OK)
        *out = largest_singular(s, x->p);
    return status;
}

static int32_t reciprocity_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const check *x = context;
    cplx s[LSTUB__PORTS2];
    int32_t p = x->p, status = lstub__net_load(x->s, i, p, "s", s, err);
    if (status < 0)
        return status;
    *out = 0.0;
    for (int32_t j = 0; j < p; j++)
        for (int32_t k = j + 1; k < p; k++)
            *out = fmax(*out, cplx_abs(cplx_sub(s[j * p + k], s[k * p + j])));
    return LSTUB_OK;
}

static int32_t each(lstub__net_item *item, const double *s, size_t n, int32_t p, double *out, const char *field, int32_t *status,
                    lstub_error *err)
{
    check x = {s, p};
    int32_t result = lstub__net_ports(p, 0, err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(s, "s", err) < 0 || lstub__need(out, field, err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(item, &x, n, 1, out, status, err);
}

int32_t lstub_network_passivity(const double *s, size_t n, int32_t p, double *sigma, int32_t *status, lstub_error *err)
{
    return each(passivity_item, s, n, p, sigma, "sigma", status, err);
}

int32_t lstub_network_reciprocity(const double *s, size_t n, int32_t p, double *difference, int32_t *status, lstub_error *err)
{
    return each(reciprocity_item, s, n, p, difference, "difference", status, err);
}
