/* Networks one behind the other, taken apart again, and a stub across a line. */
#include "network/network.h"

#include <math.h>
#include <string.h>

#define HALF (LSTUB_PORTS_MAX / 2 * LSTUB_PORTS_MAX / 2)

/* out += a b, a m x m, b m x count, given with the strides of their rows; out is neither. */
static void add_product(const cplx *a, int sa, const cplx *b, int sb, int m, int count, cplx *out, int so)
{
    for (int i = 0; i < m; i++)
        for (int k = 0; k < m; k++)
            for (int j = 0; j < count; j++)
                out[i * so + j] = cplx_fma(out[i * so + j], a[i * sa + k], b[k * sb + j]);
}

static void copy(const cplx *from, int sf, int m, int count, cplx *to, int st)
{
    for (int i = 0; i < m; i++)
        memcpy(to + i * st, from + i * sf, (size_t)count * sizeof *to);
}

/* The wave to the right at the joint, r = A21 a1 + A22 l, and the one to the left, l = B11 r + B12 a2:
** (1 - A22 B11) r = A21 a1 + A22 B12 a2. */
double lstub__net_cascade(const cplx *a, const cplx *b, int p, cplx *out)
{
    cplx den[HALF] = {{0.0, 0.0}}, drive[2 * HALF] = {{0.0, 0.0}}, r[2 * HALF], l[2 * HALF] = {{0.0, 0.0}}, s[LSTUB__PORTS2] = {{0.0, 0.0}};
    double size[HALF] = {0.0};
    int m = p / 2, lower = m * p;
    for (int i = 0; i < m; i++)
        for (int j = 0; j < m; j++) {
            double sum = i == j;
            cplx x = cplx_of(sum, 0.0);
            for (int k = 0; k < m; k++) {
                cplx a22 = a[lower + i * p + m + k], b11 = b[k * p + j];
                x = cplx_fms(x, a22, b11);
                sum += cplx_abs(a22) * cplx_abs(b11);
            }
            den[i * m + j] = x;
            size[i * m + j] = sum;
        }
    copy(a + lower, p, m, m, drive, p);
    add_product(a + lower + m, p, b + m, p, m, m, drive + m, p);
    double condition = lstub__left_divide(den, size, m, drive, p, r);
    if (!(condition < HUGE_VAL))
        return condition;
    copy(b + m, p, m, m, l + m, p);
    add_product(b, p, r, p, m, p, l, p);
    copy(a, p, m, m, s, p);                                    /* b1 = A11 a1 + A12 l */
    add_product(a + m, p, l, p, m, p, s, p);
    copy(b + lower + m, p, m, m, s + lower + m, p);            /* b2 = B21 r + B22 a2 */
    add_product(b + lower, p, r, p, m, p, s + lower, p);
    memcpy(out, s, (size_t)(p * p) * sizeof *s);
    return condition;
}

/*
** Waves at the joint behind L: l = L12^-1 (b1 - L11 a1) out of what follows, r = L21 a1 + L22 l into it. With b = M a
** they are l = G a1 + H a2, r = R a1 + L22 H a2; what follows is (l, b2) over (r, a2).
*/
static double take_left(cplx *s, const cplx *left, int p)
{
    cplx l12[HALF] = {{0.0, 0.0}}, r[HALF] = {{0.0, 0.0}}, lh[HALF] = {{0.0, 0.0}};
    cplx drive[2 * HALF] = {{0.0, 0.0}}, gh[2 * HALF], rows[2 * HALF] = {{0.0, 0.0}}, over_r[2 * HALF];
    double unit[HALF] = {0.0};             /* waves are good to rounding of 1, however little comes through */
    int m = p / 2, lower = m * p;
    copy(left + m, p, m, m, l12, m);
    copy(s, p, m, p, drive, p);
    for (int i = 0; i < m; i++) {
        unit[i * m + i] = 1.0;
        for (int j = 0; j < m; j++)
            drive[i * p + j] = cplx_sub(drive[i * p + j], left[i * p + j]);
    }
    double condition = lstub__left_divide(l12, unit, m, drive, p, gh);
    if (!(condition < HUGE_VAL))
        return condition;
    copy(left + lower, p, m, m, r, m);
    add_product(left + lower + m, p, gh, p, m, m, r, m);
    add_product(left + lower + m, p, gh + m, p, m, m, lh, m);
    copy(gh, p, m, m, rows, m);
    copy(s + lower, p, m, m, rows + m * m, m);
    condition *= lstub__right_divide(r, unit, m, rows, p, over_r);
    if (!(condition < HUGE_VAL))
        return condition;
    for (int k = 0; k < m * m; k++)
        lh[k] = cplx_neg(lh[k]);
    copy(gh + m, p, m, m, s + m, p);                           /* H - G R^-1 L22 H, and below M22 likewise */
    add_product(over_r, m, lh, m, m, m, s + m, p);
    add_product(over_r + m * m, m, lh, m, m, m, s + lower + m, p);
    copy(over_r, m, p, m, s, p);
    return condition;
}

/* Left and right exchanged. */
static void flip(const cplx *s, int p, cplx *out)
{
    for (int i = 0; i < p; i++)
        for (int j = 0; j < p; j++)
            out[(i + p / 2) % p * p + (j + p / 2) % p] = s[i * p + j];
}

double lstub__net_deembed(const cplx *measured, const cplx *left, const cplx *right, int p, cplx *out)
{
    cplx s[LSTUB__PORTS2], flipped[LSTUB__PORTS2], turned[LSTUB__PORTS2];
    double condition = 1.0;
    memcpy(s, measured, (size_t)(p * p) * sizeof *s);
    if (left != NULL)
        condition = take_left(s, left, p);
    if (right != NULL && condition < HUGE_VAL) {
        flip(s, p, flipped);
        flip(right, p, turned);
        condition = fmax(condition, take_left(flipped, turned, p));
        flip(flipped, p, s);
    }
    memcpy(out, s, (size_t)(p * p) * sizeof *s);
    return condition;
}

typedef struct joint {
    const double *a, *b, *c;
    int32_t       p;
} joint;

static int32_t cascade_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const joint *x = context;
    cplx a[LSTUB__PORTS2], b[LSTUB__PORTS2];
    int32_t status;
    if ((status = lstub__net_load(x->a, i, x->p, "a", a, err)) < 0 || (status = lstub__net_load(x->b, i, x->p, "b", b, err)) < 0)
        return status;
    status = lstub__net_judge(lstub__net_cascade(a, b, x->p, a), "1 - a22 b11", err);
    lstub__net_store(a, x->p, out);
    return status;
}

int32_t lstub_network_cascade(const double *a, const double *b, size_t n, int32_t p, double *out, int32_t *status, lstub_error *err)
{
    joint x = {a, b, NULL, p};
    int32_t result = lstub__net_ports(p, 1, err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(a, "a", err) < 0 || lstub__need(b, "b", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(cascade_item, &x, n, 2 * (size_t)p * (size_t)p, out, status, err);
}

static int32_t deembed_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const joint *x = context;
    cplx s[LSTUB__PORTS2], left[LSTUB__PORTS2], right[LSTUB__PORTS2];
    int32_t status;
    if ((status = lstub__net_load(x->a, i, x->p, "measured", s, err)) < 0
        || (x->b != NULL && (status = lstub__net_load(x->b, i, x->p, "left", left, err)) < 0)
        || (x->c != NULL && (status = lstub__net_load(x->c, i, x->p, "right", right, err)) < 0))
        return status;
    status = lstub__net_judge(lstub__net_deembed(s, x->b != NULL ? left : NULL, x->c != NULL ? right : NULL, x->p, s),
                              "transmission of left or right", err);
    lstub__net_store(s, x->p, out);
    return status;
}

int32_t lstub_network_deembed(const double *measured, const double *left, const double *right, size_t n, int32_t p, double *out,
                              int32_t *status, lstub_error *err)
{
    joint x = {measured, left, right, p};
    int32_t result = lstub__net_ports(p, 1, err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(measured, "measured", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(deembed_item, &x, n, 2 * (size_t)p * (size_t)p, out, status, err);
}

typedef struct stub {
    const double *zin;
    double        z_ref;
} stub;

/* S11 = -z/(2 Zin + z), S21 = 2 Zin/(2 Zin + z). */
static int32_t shunt_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const stub *x = context;
    cplx zin = cplx_of(x->zin[2 * i], x->zin[2 * i + 1]), s[4];
    if (isnan(zin.re) || isnan(zin.im))
        return lstub__fail(err, LSTUB_E_ARGUMENT, "zin", (int64_t)i, "zin[%lu] = %g%+gj ohm: must not be NaN", (unsigned long)i, zin.re, zin.im);
    cplx sum = cplx_add(cplx_scale(zin, 2.0), cplx_of(x->z_ref, 0.0));
    int nothing = isinf(sum.re) || isinf(sum.im);
    double condition = (2.0 * (fabs(zin.re) + fabs(zin.im)) + x->z_ref) / cplx_abs(sum);
    s[0] = s[3] = nothing ? cplx_of(0.0, 0.0) : cplx_div(cplx_of(-x->z_ref, 0.0), sum);
    s[1] = s[2] = nothing ? cplx_of(1.0, 0.0) : cplx_div(cplx_scale(zin, 2.0), sum);
    lstub__net_store(s, 2, out);
    return nothing ? LSTUB_OK : lstub__net_judge(condition, "2 zin + z_ref", err);
}

int32_t lstub_network_shunt(const double *zin, size_t n, double z_ref, double *s, int32_t *status, lstub_error *err)
{
    stub x = {zin, z_ref};
    int32_t result = lstub__net_references(&z_ref, 1, "z_ref", err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(zin, "zin", err) < 0 || lstub__need(s, "s", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(shunt_item, &x, n, 8, s, status, err);
}
