/* Renormalisation and conversion of many frequencies. */
#include "network/network.h"

typedef struct renormalisation {
    const double *s, *from, *to;
    size_t        stride;      /* doubles from one frequency's impedances to the next; 0: real, the same for all */
    int32_t       p;
} renormalisation;

static int32_t impedances(const double *z, size_t i, const renormalisation *r, const char *field, cplx *out, lstub_error *err)
{
    static const lstub__range REAL = {1e-6, 1e9, 0, "ohm"}, IMAGINARY = {-1e9, 1e9, 0, "ohm"};
    int32_t status = LSTUB_OK;
    for (int32_t k = 0; k < r->p; k++) {
        out[k] = r->stride ? cplx_of(z[i * r->stride + 2 * (size_t)k], z[i * r->stride + 2 * (size_t)k + 1]) : cplx_of(z[k], 0.0);
        if ((status = lstub__check(out[k].re, &REAL, field, err)) < 0 || (status = lstub__check(out[k].im, &IMAGINARY, field, err)) < 0) {
            lstub__fail_where(err, (int64_t)i, "port %ld", (long)k);
            return status;
        }
    }
    return status;
}

static int32_t renormalise_item(const void *context, size_t i, double *out, lstub_error *err)
{
    const renormalisation *r = context;
    cplx s[LSTUB__PORTS2], from[LSTUB_PORTS_MAX], to[LSTUB_PORTS_MAX];
    int32_t status;
    if ((status = lstub__net_load(r->s, i, r->p, "s", s, err)) < 0 || (status = impedances(r->from, i, r, "z_from", from, err)) < 0
        || (status = impedances(r->to, i, r, "z_to", to, err)) < 0)
        return status;
    status = lstub__net_judge(lstub__net_renormalise(s, r->p, from, to, s), "s", err);
    lstub__net_store(s, r->p, out);
    return status;
}

static int32_t renormalise(const renormalisation *r, size_t n, double *out, int32_t *status, lstub_error *err)
{
    if (n > 0 && (lstub__need(r->s, "s", err) < 0 || lstub__need(r->from, "z_from", err) < 0 || lstub__need(r->to, "z_to", err) < 0
                  || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(renormalise_item, r, n, 2 * (size_t)r->p * (size_t)r->p, out, status, err);
}

int32_t lstub_network_renormalise(const double *s, size_t n, int32_t p, const double *z_from, const double *z_to, double *out,
                                  int32_t *status, lstub_error *err)
{
    renormalisation r = {s, z_from, z_to, 0, p};
    int32_t result;
    if ((result = lstub__net_ports(p, 0, err)) < 0 || (result = lstub__net_references(z_from, p, "z_from", err)) < 0
        || (result = lstub__net_references(z_to, p, "z_to", err)) < 0)
        return result;
    return renormalise(&r, n, out, status, err);
}

int32_t lstub_network_renormalise_complex(const double *s, size_t n, int32_t p, const double *z_from, const double *z_to, double *out,
                                          int32_t *status, lstub_error *err)
{
    renormalisation r = {s, z_from, z_to, 2 * (size_t)p, p};
    int32_t result = lstub__net_ports(p, 0, err);
    return result < 0 ? result : renormalise(&r, n, out, status, err);
}

typedef struct conversion {
    const double *in, *z;
    int32_t       p, from, to;
} conversion;

static int32_t convert_item(const void *context, size_t i, double *out, lstub_error *err)
{
    static const char *const WHAT[] = {"", "s", "z", "y", "abcd", "g", "h"};
    const conversion *c = context;
    cplx m[LSTUB__PORTS2];
    int32_t status = lstub__net_load(c->in, i, c->p, "in", m, err);
    if (status < 0)
        return status;
    status = lstub__net_judge(lstub__net_convert(m, c->p, c->from, c->to, c->z, m), WHAT[c->to], err);
    lstub__net_store(m, c->p, out);
    return status;
}

static int32_t check_kind(int32_t kind, int32_t p, const char *field, lstub_error *err)
{
    if (kind < LSTUB_NETWORK_S || kind > LSTUB_NETWORK_H)
        return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %ld: must be LSTUB_NETWORK_S, _Z, _Y, _ABCD, _G or _H (1 to 6)", field,
                           (long)kind);
    if (kind >= LSTUB_NETWORK_G && p != 2)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "p", -1, "p = %ld ports: must be 2 for LSTUB_NETWORK_G and _H", (long)p);
    return lstub__net_ports(p, kind == LSTUB_NETWORK_ABCD, err);
}

int32_t lstub_network_convert(const double *in, size_t n, int32_t p, int32_t from, int32_t to, const double *z, double *out,
                              int32_t *status, lstub_error *err)
{
    double usual[LSTUB_PORTS_MAX];
    int32_t result;
    for (int i = 0; i < LSTUB_PORTS_MAX; i++)
        usual[i] = 50.0;
    conversion c = {in, z != NULL ? z : usual, p, from, to};
    if ((result = lstub__net_ports(p, 0, err)) < 0 || (result = check_kind(from, p, "from", err)) < 0
        || (result = check_kind(to, p, "to", err)) < 0
        || (result = lstub__net_references(c.z, p, "z", err)) < 0)
        return result;
    if (n > 0 && (lstub__need(in, "in", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    return lstub__net_each(convert_item, &c, n, 2 * (size_t)p * (size_t)p, out, status, err);
}
