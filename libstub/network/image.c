/* Networks as voltages and currents at the ports, see image.h. */
#include "network/image.h"

#include <math.h>

static double size_of(cplx z) { return fabs(z.re) + fabs(z.im); }

void lstub__image_of_waves(const cplx *s, int p, const cplx *z, lstub__image *m)
{
    for (int i = 0; i < p; i++) {
        double scale = 1.0 / sqrt(z[i].re);
        for (int j = 0; j < p; j++) {
            int k = i * p + j;
            cplx zs = cplx_mul(z[i], s[k]);
            cplx one = cplx_of(i == j, 0.0), z_conj = i == j ? cplx_conj(z[i]) : cplx_of(0.0, 0.0);
            m->v[k] = cplx_scale(cplx_add(z_conj, zs), scale);
            m->i[k] = cplx_scale(cplx_sub(one, s[k]), scale);
            m->size_v[k] = scale * (size_of(z_conj) + size_of(zs));
            m->size_i[k] = scale * (one.re + size_of(s[k]));
        }
    }
}

double lstub__waves_of_image(const lstub__image *m, int p, const cplx *z, cplx *s)
{
    cplx a[LSTUB__PORTS2], b[LSTUB__PORTS2];
    double size[LSTUB__PORTS2];
    for (int i = 0; i < p; i++) {
        double scale = 0.5 / sqrt(z[i].re);
        for (int k = i * p; k < (i + 1) * p; k++) {
            a[k] = cplx_scale(cplx_fma(m->v[k], z[i], m->i[k]), scale);
            b[k] = cplx_scale(cplx_fms(m->v[k], cplx_conj(z[i]), m->i[k]), scale);
            size[k] = scale * (m->size_v[k] + size_of(z[i]) * m->size_i[k]);
        }
    }
    return lstub__right_divide(a, size, p, b, p, s);
}

double lstub__net_renormalise(const cplx *s, int p, const cplx *z_from, const cplx *z_to, cplx *out)
{
    lstub__image m;
    lstub__image_of_waves(s, p, z_from, &m);
    return lstub__waves_of_image(&m, p, z_to, out);
}

/* A voltage or a current at a port, in units of the references: V/root or I root. */
typedef struct quantity {
    int    current, port;
    double sign;
} quantity;

static quantity voltage(int port) { quantity q = {0, port, 1.0}; return q; }
static quantity current(int port, double sign) { quantity q = {1, port, sign}; return q; }

/* What a matrix of that kind multiplies, and what comes of it: out[k] = sum of matrix[k, l] in[l]. */
static void meaning(int kind, int p, quantity *out, quantity *in)
{
    int half = p / 2;
    for (int k = 0; k < p; k++)
        switch (kind) {
        case LSTUB_NETWORK_Z:
            out[k] = voltage(k);
            in[k] = current(k, 1.0);
            break;
        case LSTUB_NETWORK_Y:
            out[k] = current(k, 1.0);
            in[k] = voltage(k);
            break;
        case LSTUB_NETWORK_G:
            out[k] = k == 0 ? current(0, 1.0) : voltage(1);
            in[k] = k == 0 ? voltage(0) : current(1, 1.0);
            break;
        case LSTUB_NETWORK_H:
            out[k] = k == 0 ? voltage(0) : current(1, 1.0);
            in[k] = k == 0 ? current(0, 1.0) : voltage(1);
            break;
        default:       /* ABCD */
            out[k] = k < half ? voltage(k) : current(k - half, 1.0);
            in[k] = k < half ? voltage(k + half) : current(k, -1.0);
            break;
        }
}

/* Value in units of the references per volt or ampere. */
static double unit_of(quantity q, const double *root) { return q.current ? root[q.port] : 1.0 / root[q.port]; }

static void image_of_matrix(const cplx *in, int p, int kind, const double *root, lstub__image *m)
{
    quantity result[LSTUB_PORTS_MAX], given[LSTUB_PORTS_MAX];
    meaning(kind, p, result, given);
    for (int k = 0; k < p; k++) {
        cplx *row = (result[k].current ? m->i : m->v) + result[k].port * p, *same = (given[k].current ? m->i : m->v) + given[k].port * p;
        for (int j = 0; j < p; j++) {
            row[j] = cplx_scale(in[k * p + j], unit_of(result[k], root) / unit_of(given[j], root));
            same[j] = cplx_of(j == k ? given[k].sign : 0.0, 0.0);
        }
    }
    for (int k = 0; k < p * p; k++) {
        m->size_v[k] = size_of(m->v[k]);
        m->size_i[k] = size_of(m->i[k]);
    }
}

static double matrix_of_image(const lstub__image *m, int p, int kind, const double *root, cplx *out)
{
    quantity result[LSTUB_PORTS_MAX], given[LSTUB_PORTS_MAX];
    cplx num[LSTUB__PORTS2], den[LSTUB__PORTS2];
    double size[LSTUB__PORTS2];
    meaning(kind, p, result, given);
    for (int k = 0; k < p; k++)
        for (int j = 0; j < p; j++) {
            int from = given[k].port * p + j;
            num[k * p + j] = (result[k].current ? m->i : m->v)[result[k].port * p + j];
            den[k * p + j] = cplx_scale((given[k].current ? m->i : m->v)[from], given[k].sign);
            size[k * p + j] = (given[k].current ? m->size_i : m->size_v)[from];
        }
    double condition = lstub__right_divide(den, size, p, num, p, out);
    for (int k = 0; k < p; k++)
        for (int j = 0; j < p; j++)
            out[k * p + j] = cplx_scale(out[k * p + j], unit_of(given[j], root) / unit_of(result[k], root));
    return condition;
}

double lstub__net_convert(const cplx *in, int p, int from, int to, const double *z, cplx *out)
{
    lstub__image m;
    cplx one[LSTUB_PORTS_MAX];
    double root[LSTUB_PORTS_MAX];
    for (int i = 0; i < p; i++) {
        one[i] = cplx_of(1.0, 0.0);
        root[i] = sqrt(z[i]);
    }
    if (from == to) {
        for (int k = 0; k < p * p; k++)
            out[k] = in[k];
        return 1.0;
    }
    if (from == LSTUB_NETWORK_S)
        lstub__image_of_waves(in, p, one, &m);
    else
        image_of_matrix(in, p, from, root, &m);
    return to == LSTUB_NETWORK_S ? lstub__waves_of_image(&m, p, one, out) : matrix_of_image(&m, p, to, root, out);
}
