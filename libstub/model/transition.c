/* A transition at frequencies: open-circuit impedances of the barrel, launches, lines, references. */
#include "model/transition.h"
#include "num/dense.h"

#include <math.h>
#include <string.h>

#define MOST (2 * LSTUB__WAYS)

/* A port's line at one frequency: V_out = c V + s I, I_out = y V + c I towards the reference plane. */
typedef struct line_at { cplx c, s, y, launch_y; double launch_x; } line_at;

static line_at line_of(const lstub__way *w, double f)
{
    line_at l = {{1.0, 0.0}, {0.0, 0.0}, {0.0, 0.0}, {0.0, 0.0}, 0.0};
    cplx z, gamma, e;
    double omega = 2.0 * LSTUB_PI * f;
    if (w->kind == LSTUB_PORT_COAX)
        return l;
    if (w->has_trace) {
        lstub__trace_at(&w->trace, f, &z, &gamma);
    } else {
        cplx root = cplx_sqrt(cplx_of(w->dk, -w->dk * w->loss_tangent));
        gamma = cplx_scale(cplx_of(-root.im, root.re), omega / LSTUB_C0);
        z = cplx_scale(cplx_div(cplx_of(sqrt(w->dk), 0.0), root), w->impedance);
    }
    e = cplx_exp(cplx_scale(gamma, w->length));
    l.c = cplx_scale(cplx_add(e, cplx_inv(e)), 0.5);
    l.y = cplx_scale(cplx_sub(e, cplx_inv(e)), 0.5);
    l.s = cplx_mul(l.y, z);
    l.y = cplx_div(l.y, z);
    l.launch_x = omega * w->launch_l;
    l.launch_y = cplx_of(0.0, -gamma.im * w->launch_c / cplx_abs(z));
    return l;
}

/*
** S from z[n][n] at the pads' rims, by columns of current: V = Z' I with the launch's inductance in Z', then I' = I + y V with
** its (negative) capacitance, then the line; a = V + z I, b = V - z I.
*/
static void to_waves(const cplx *z, int n, const line_at *line, const double *z_ref, cplx *s)
{
    cplx a[MOST * MOST], b[MOST * MOST];
    for (int i = 0; i < n; i++)
        for (int j = 0; j < n; j++) {
            const line_at *l = &line[i];
            cplx v = z[i * n + j], current = cplx_of(i == j ? 1.0 : 0.0, 0.0), v_out, i_out;
            if (i == j)
                v.im += l->launch_x;
            current = cplx_fma(current, l->launch_y, v);
            v_out = cplx_fma(cplx_mul(l->c, v), l->s, current);
            i_out = cplx_scale(cplx_fma(cplx_mul(l->y, v), l->c, current), z_ref[i]);
            a[j * n + i] = cplx_scale(cplx_add(v_out, i_out), 1.0 / sqrt(z_ref[i]));     /* transposed: S a = b */
            b[j * n + i] = cplx_scale(cplx_sub(v_out, i_out), 1.0 / sqrt(z_ref[i]));
        }
    if (lstub__zsolve(a, n, n, b, n, n) != 0) {
        for (int i = 0; i < n * n; i++)
            s[i] = cplx_of(NAN, NAN);
        return;
    }
    for (int i = 0; i < n; i++)
        for (int j = 0; j < n; j++)
            s[i * n + j] = b[j * n + i];
}

void lstub__transition_mode(const lstub_transition *t, int mode, double f, cplx *s)
{
    int n = t->modes == 0 ? 2 * t->ways : t->ways, place[MOST];
    cplx eps[LSTUB__CAV_MEDIA], surface[LSTUB__CAV_METALS], z[LSTUB__CAV_PORTS * LSTUB__CAV_PORTS], mine[MOST * MOST];
    line_at line[MOST];
    double z_ref[MOST];
    lstub__barrel_media(t->barrel[mode], f, eps);
    if (!t->perfect)
        lstub__barrel_metals(t->barrel[mode], f, surface);
    lstub__cavity_ports(t->cavity[mode], f, eps, t->perfect ? NULL : surface, z);
    for (int i = 0; i < n; i++) {
        const lstub__way *w = &t->way[i % t->ways];
        place[i] = w->place + (i < t->ways ? 0 : t->ways);
        z_ref[i] = w->z_ref;
        line[i] = i < t->ways ? line_of(w, f) : line[i - t->ways];
    }
    for (int i = 0; i < n; i++)
        for (int j = 0; j < n; j++)
            mine[i * n + j] = z[place[i] * n + place[j]];
    to_waves(mine, n, line, z_ref, s);
}

static void put(double *out, int n, int i, int j, cplx s)
{
    out[2 * (i * n + j)] = s.re;
    out[2 * (i * n + j) + 1] = s.im;
}

void lstub__transition_whole(const lstub_transition *t, double f, double *out)
{
    int m = t->ways, n = t->size;
    cplx odd[MOST * MOST], even[LSTUB__WAYS * LSTUB__WAYS];
    lstub__transition_mode(t, 0, f, odd);
    if (t->modes < 2) {
        memcpy(out, odd, (size_t)(n * n) * sizeof odd[0]);
        return;
    }
    lstub__transition_mode(t, 1, f, even);
    for (int i = 0; i < m; i++)
        for (int j = 0; j < m; j++) {
            cplx o = odd[i * m + j], e = even[i * m + j], same = cplx_scale(cplx_add(e, o), 0.5), across = cplx_scale(cplx_sub(e, o), 0.5);
            put(out, n, i, j, same);
            put(out, n, i + m, j + m, same);
            put(out, n, i, j + m, across);
            put(out, n, i + m, j, across);
        }
}

int32_t lstub_transition_ports(const lstub_transition *t) { return t == NULL ? 0 : t->size; }

int32_t lstub_transition_remarks(const lstub_transition *t) { return t == NULL ? 0 : t->remarks; }

int32_t lstub_transition_reference(const lstub_transition *t, int32_t port, double *z_ref, lstub_error *err)
{
    if (lstub__need(t, "transition", err) < 0 || lstub__need(z_ref, "z_ref", err) < 0)
        return LSTUB_E_NULL;
    if (port < 0 || port >= lstub_transition_ports(t))
        return lstub__fail(err, LSTUB_E_ARGUMENT, "port", -1, "port = %ld: must be >= 0 and < %ld", (long)port, (long)lstub_transition_ports(t));
    *z_ref = t->way[port % t->ways].z_ref;
    return LSTUB_OK;
}

#define RANGE 110e9

/* Top of the stated range: of the model, and of the traces' formulas. */
static double stated_range(const lstub_transition *t)
{
    double top = RANGE;
    for (int i = 0; i < t->ways; i++)
        if (t->way[i].has_trace)
            top = fmin(top, t->way[i].trace.f_range);
    return top;
}

int32_t lstub_transition_s(const lstub_transition *t, const double *freq, size_t n, double *s, int32_t *status, lstub_error *err)
{
    if (lstub__need(t, "transition", err) < 0 || (n > 0 && (lstub__need(freq, "freq", err) < 0 || lstub__need(s, "s", err) < 0)))
        return LSTUB_E_NULL;
    lstub__range band = {1e6, t->f_top, 0, "Hz"};
    lstub__batch batch = {0, 0};
    int p = (int)lstub_transition_ports(t);
    double top = stated_range(t);
    for (size_t i = 0; i < n; i++) {
        lstub_error item;
        LSTUB_INIT(item);
        double *to = s + 2 * (size_t)(p * p) * i;
        int32_t one = lstub__check(freq[i], &band, "freq", &item);
        if (one == LSTUB_OK) {
            if (!lstub__table_read(t, freq[i], to))
                lstub__transition_whole(t, freq[i], to);
            if (!(fabs(to[0]) < HUGE_VAL))
                one = lstub__fail(&item, LSTUB_E_NONE, "freq", -1, "freq = %.9g Hz: the model is singular there", freq[i]);
            else if (freq[i] > top)
                one = LSTUB_W_RANGE;
        }
        for (int k = 0; one < 0 && k < 2 * p * p; k++)
            to[k] = NAN;
        if (status != NULL)
            status[i] = one;
        lstub__batch_add(&batch, one, (int64_t)i, &item, err);
    }
    if (batch.result > 0)
        lstub__fail(err, batch.result, "freq", -1, "freq: beyond the stated range of this transition, which ends at %.6g Hz", top);
    return batch.result;
}
