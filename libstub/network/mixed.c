/* Single-ended and mixed-mode networks: sums and differences of the ports' voltages and currents. */
#include "network/image.h"

#include <math.h>

typedef struct mixing {
    const double *s;
    int32_t       p, pairs;
    int32_t       port[LSTUB_PORTS_MAX];      /* mode -> its port; of a differential mode the positive, of a common the negative one */
    cplx          z[LSTUB_PORTS_MAX], z_mixed[LSTUB_PORTS_MAX];
} mixing;

/* Row `to` = c1 row a + c2 row b. */
static void combine(cplx *m, double *size, int p, int to, const cplx *from, const double *from_size, int a, double c1, int b, double c2)
{
    for (int j = 0; j < p; j++) {
        m[to * p + j] = cplx_add(cplx_scale(from[a * p + j], c1), cplx_scale(from[b * p + j], c2));
        size[to * p + j] = fabs(c1) * from_size[a * p + j] + fabs(c2) * from_size[b * p + j];
    }
}

static void to_modes(const mixing *x, const lstub__image *in, lstub__image *out)
{
    for (int k = 0; k < x->p; k++) {
        int alone = k >= 2 * x->pairs, common = k >= x->pairs, pair = k % (x->pairs ? x->pairs : 1);
        int a = alone ? x->port[k] : x->port[pair], b = alone ? a : x->port[x->pairs + pair];
        double v1 = common && !alone ? 0.5 : 1.0, v2 = alone ? 0.0 : common ? 0.5 : -1.0;
        double i1 = common || alone ? 1.0 : 0.5, i2 = alone ? 0.0 : common ? 1.0 : -0.5;
        combine(out->v, out->size_v, x->p, k, in->v, in->size_v, a, v1, b, v2);
        combine(out->i, out->size_i, x->p, k, in->i, in->size_i, a, i1, b, i2);
    }
}

static void to_ports(const mixing *x, const lstub__image *in, lstub__image *out)
{
    for (int k = 0; k < x->p; k++) {
        int alone = k >= 2 * x->pairs, negative = k >= x->pairs, pair = k % (x->pairs ? x->pairs : 1);
        int d = alone ? k : pair, c = alone ? k : x->pairs + pair;
        double sign = negative ? -1.0 : 1.0;
        combine(out->v, out->size_v, x->p, x->port[k], in->v, in->size_v, d, alone ? 1.0 : 0.5 * sign, c, alone ? 0.0 : 1.0);
        combine(out->i, out->size_i, x->p, x->port[k], in->i, in->size_i, d, alone ? 1.0 : sign, c, alone ? 0.0 : 0.5);
    }
}

static int32_t item(const mixing *x, size_t i, double *out, int to_mixed, lstub_error *err)
{
    cplx s[LSTUB__PORTS2];
    lstub__image in, mixed;
    int32_t status = lstub__net_load(x->s, i, x->p, "s", s, err);
    if (status < 0)
        return status;
    lstub__image_of_waves(s, x->p, to_mixed ? x->z : x->z_mixed, &in);
    (to_mixed ? to_modes : to_ports)(x, &in, &mixed);
    status = lstub__net_judge(lstub__waves_of_image(&mixed, x->p, to_mixed ? x->z_mixed : x->z, s), "s", err);
    lstub__net_store(s, x->p, out);
    return status;
}

static int32_t to_mixed_item(const void *context, size_t i, double *out, lstub_error *err) { return item(context, i, out, 1, err); }
static int32_t to_single_item(const void *context, size_t i, double *out, lstub_error *err) { return item(context, i, out, 0, err); }

/* Which port stands where, and the references of all. */
static int32_t prepare(mixing *x, int32_t p, const int32_t *pairs, int32_t count, const double *z, lstub_error *err)
{
    int used[LSTUB_PORTS_MAX] = {0};
    int32_t status, next = 2 * count;
    if ((status = lstub__net_ports(p, 0, err)) < 0 || (status = lstub__net_references(z, p, "z", err)) < 0)
        return status;
    if (count < 0 || count > p / 2)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "pair_count", -1, "pair_count = %ld: must be >= 0 and <= %ld of %ld ports", (long)count,
                           (long)(p / 2), (long)p);
    if (count > 0 && (status = lstub__need(pairs, "pairs", err)) < 0)
        return status;
    for (int32_t k = 0; k < 2 * count; k++) {
        int32_t port = pairs[k];
        if (port < 0 || port >= p || used[port])
            return lstub__fail(err, LSTUB_E_ARGUMENT, "pairs", k / 2, "pair %ld: port %ld: must be >= 0 and < %ld, and stand in one place only",
                               (long)(k / 2), (long)port, (long)p);
        used[port] = 1;
        x->port[k % 2 ? count + k / 2 : k / 2] = port;
    }
    for (int32_t port = 0; port < p; port++)
        if (!used[port])
            x->port[next++] = port;
    for (int32_t k = 0; k < p; k++) {
        x->z[k] = cplx_of(z[k], 0.0);
        x->z_mixed[k] = cplx_of(z[x->port[k]], 0.0);
    }
    for (int32_t k = 0; k < count; k++) {
        double positive = z[x->port[k]], negative = z[x->port[count + k]];
        x->z_mixed[k].re = positive + negative;
        x->z_mixed[count + k].re = positive * negative / (positive + negative);
    }
    x->p = p;
    x->pairs = count;
    return LSTUB_OK;
}

int32_t lstub_network_to_mixed(const double *s, size_t n, int32_t p, const int32_t *pairs, int32_t pair_count, const double *z,
                               double *out, double *z_mixed, int32_t *status, lstub_error *err)
{
    mixing x = {.s = s};
    int32_t result = prepare(&x, p, pairs, pair_count, z, err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(s, "s", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    for (int32_t k = 0; z_mixed != NULL && k < p; k++)
        z_mixed[k] = x.z_mixed[k].re;
    return lstub__net_each(to_mixed_item, &x, n, 2 * (size_t)p * (size_t)p, out, status, err);
}

int32_t lstub_network_to_single(const double *s, size_t n, int32_t p, const int32_t *pairs, int32_t pair_count, const double *z,
                                double *out, int32_t *status, lstub_error *err)
{
    mixing x = {.s = s};
    int32_t result = prepare(&x, p, pairs, pair_count, z, err);
    if (result < 0)
        return result;
    if (n > 0 && (lstub__need(s, "s", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(to_single_item, &x, n, 2 * (size_t)p * (size_t)p, out, status, err);
}
