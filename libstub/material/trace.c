/* Traces: checked, put together from shape, dielectrics and metal, and evaluated. */
#include "material/trace.h"
#include "material/conductor.h"
#include "material/strip.h"

#include <math.h>

#define F_SHAPE 1e9             /* Hz, where the shape sees the dielectrics' contrast */
#define CONTRAST_MOST 2.0       /* of the two Dk of a stripline: they mix by first order */

/* Reads the structs pointed to, with the defaults of the null ones. */
static int32_t take_materials(const lstub_trace *in, lstub_dielectric *below, lstub_dielectric *above,
                              lstub_conductor *conductor, lstub_error *err)
{
    int32_t status;
    lstub_conductor smooth;
    if (lstub__need(in->dielectric_below, "dielectric_below", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__dielectric_take(below, in->dielectric_below, err)) < 0) {
        lstub__fail_where(err, -1, "dielectric_below");
        return status;
    }
    *above = *below;
    if (in->dielectric_above != NULL && (status = lstub__dielectric_take(above, in->dielectric_above, err)) < 0) {
        lstub__fail_where(err, -1, "dielectric_above");
        return status;
    }
    if (in->dielectric_above == NULL && in->kind == LSTUB_TRACE_MICROSTRIP) {
        above->dk = above->in_plane_ratio = 1.0;
        above->loss_tangent = 0.0;
    }
    LSTUB_INIT(smooth);
    return lstub__conductor_take(conductor, in->conductor == NULL ? &smooth : in->conductor, err);
}

static int32_t take_shape(lstub_trace *ours, const lstub_trace *theirs, lstub_error *err)
{
    static const lstub__range LENGTH = {1e-6, 0.01, 0, "m"}, THICKNESS = {0.0, 1e-3, 0, "m"}, NONE = {0.0, 0.0, 0, "m"};
    int32_t status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "trace", err);
    if (status < 0)
        return status;
    if (ours->kind != LSTUB_TRACE_MICROSTRIP && ours->kind != LSTUB_TRACE_STRIPLINE)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "kind", -1, "kind = %ld: must be 0 (MICROSTRIP) or 1 (STRIPLINE)", (long)ours->kind);
    if (ours->no_dispersion != 0 && ours->no_dispersion != 1)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "no_dispersion", -1, "no_dispersion = %ld: must be 0 or 1", (long)ours->no_dispersion);
    if ((status = lstub__check(ours->width, &LENGTH, "width", err)) < 0
        || (status = lstub__check(ours->thickness, &THICKNESS, "thickness", err)) < 0
        || (status = lstub__check(ours->height_below, &LENGTH, "height_below", err)) < 0)
        return status;
    return lstub__check(ours->height_above, ours->kind == LSTUB_TRACE_STRIPLINE ? &LENGTH : &NONE, "height_above", err);
}

/* Root of through-plane times in-plane Dk: what a trace sees once heights are stretched by the root of their ratio. */
static lstub__wideband seen(const lstub_dielectric *d, double *stretch)
{
    lstub__wideband w = lstub__wideband_of(d);
    *stretch = sqrt(d->in_plane_ratio);
    w.constant *= *stretch;
    w.slope *= *stretch;
    return w;
}

static int32_t outside(int32_t status, lstub_error *err, const char *field, double value, double low, double high)
{
    if (status == LSTUB_OK && !(value >= low && value <= high))
        return lstub__fail(err, LSTUB_W_RANGE, field, -1, "%s = %.6g: the stated range is %g to %g", field, value, low, high);
    return status;
}

static void limit(lstub__trace_model *model, double f, const char *reason)
{
    if (f < model->f_range) {
        model->f_range = f;
        model->f_reason = reason;
    }
}

static int32_t make_stripline(lstub__trace_model *model, const lstub_trace *in, double stretch_below, double stretch_above,
                              lstub_error *err)
{
    double w = in->width, t = in->thickness, h1 = in->height_below, h2 = in->height_above;
    lstub__strip real, seen_by_field;
    cplx lambda = lstub__wideband_lambda(F_SHAPE);
    double dk1 = lstub__wideband_at(model->below, lambda).re, dk2 = lstub__wideband_at(model->above, lambda).re;
    lstub__stripline(w, t, h1, h2, &real);
    double s1 = h1 * stretch_below, s2 = h2 * stretch_above;
    seen_by_field = real;
    if (s1 != h1 || s2 != h2)
        lstub__stripline(w, t * (s1 + s2) / (h1 + h2), s1, s2, &seen_by_field);
    model->inductance = LSTUB_MU0 * real.inductance;
    double over = real.inductance / seen_by_field.inductance;
    model->share_below = seen_by_field.share * over;
    model->share_above = (1.0 - seen_by_field.share) * over;
    model->planes = real.planes;
    model->metal = real.metal;
    limit(model, LSTUB_C0 / (sqrt(fmax(dk1, dk2)) * (2.0 * w + 0.5 * LSTUB_PI * (h1 + h2 + t))), "the first waveguide mode");
    int32_t status = outside(LSTUB_OK, err, "thickness/width", t / w, 0.0, 1.0);
    status = outside(status, err, "thickness/height", t / fmin(h1, h2), 0.0, 1.0);
    return outside(status, err, "Dk below over above", dk1 / dk2, 1.0 / CONTRAST_MOST, CONTRAST_MOST);
}

/*
** The static Dk is homogeneous in the two dielectrics' Dk, so their shares are its derivatives, and sum to it: the mixture
** is of the wideband form.
*/
static int32_t make_microstrip(lstub__trace_model *model, const lstub_trace *in, double stretch, lstub_error *err)
{
    lstub__strip real, seen_by_field;
    double w = in->width, t = in->thickness, h = in->height_below, field_h = h * stretch, other;
    cplx lambda = lstub__wideband_lambda(F_SHAPE);
    double above = lstub__wideband_at(model->above, lambda).re, contrast = lstub__wideband_at(model->below, lambda).re / above;
    if (contrast < 1.0)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "dielectric_above", -1,
                           "dielectric_above: Dk = %.6g at 1 GHz: must be <= that of dielectric_below, %.6g", above, contrast * above);
    lstub__microstrip(w, t, h, &real);
    double step = 1e-4, dk = lstub__microstrip_dk(w / field_h, t / field_h, contrast, &model->u);
    double up = lstub__microstrip_dk(w / field_h, t / field_h, contrast + step, &other);
    double down = contrast - step >= 1.0 ? lstub__microstrip_dk(w / field_h, t / field_h, contrast - step, &other) : dk;
    double rise = (up - down) / (contrast - step >= 1.0 ? 2.0 * step : step);
    lstub__microstrip(w, t, field_h, &seen_by_field);
    double over = real.inductance / seen_by_field.inductance;
    model->inductance = LSTUB_MU0 * real.inductance;
    model->share_below = rise * over;
    model->share_above = (dk - contrast * rise) * over;
    model->disperses = contrast > 1.0 && !in->no_dispersion;
    model->contrast = contrast;
    model->dk = dk;
    model->x_per_f = h * sqrt(above);
    model->planes = real.planes;
    model->metal = real.metal;
    limit(model, 0.1 * LSTUB_C0 / model->x_per_f, "the height is a tenth of the wavelength");
    int32_t status = outside(LSTUB_OK, err, "width/height", w / h, 0.1, 100.0);
    status = outside(status, err, "thickness/width", t / w, 0.0, 1.0);
    status = outside(status, err, "thickness/height", t / h, 0.0, 1.0);
    return outside(status, err, "Dk below over above", contrast, 1.0, 20.0);
}

int32_t lstub__trace_take(lstub__trace_model *model, const lstub_trace *trace, lstub_error *err)
{
    lstub_trace in;
    lstub_dielectric below, above;
    double stretch_below, stretch_above;
    lstub__trace_model zero = {0};
    int32_t status = take_shape(&in, trace, err);
    *model = zero;
    if (status < 0 || (status = take_materials(&in, &below, &above, &model->conductor, err)) < 0)
        return status;
    model->below = seen(&below, &stretch_below);
    model->above = seen(&above, &stretch_above);
    model->f_range = HUGE_VAL;
    limit(model, fmin(lstub__wideband_top(lstub__wideband_of(&below)), lstub__wideband_top(lstub__wideband_of(&above))),
          "a Dk falls below 1");
    status = in.kind == LSTUB_TRACE_STRIPLINE ? make_stripline(model, &in, stretch_below, stretch_above, err)
                                              : make_microstrip(model, &in, stretch_below, err);
    model->depth = model->metal * in.width * in.thickness;
    return status;
}

static cplx dk_mixed(const lstub__trace_model *model, cplx below, cplx above, double rise)
{
    double q1 = model->share_below + rise * (1.0 - model->share_below), q2 = model->share_above * (1.0 - rise);
    return cplx_fma(cplx_scale(below, q1), cplx_of(q2, 0.0), above);
}

void lstub__trace_per_metre(const lstub__trace_model *model, double f, cplx *series, cplx *shunt)
{
    double w = 2.0 * LSTUB_PI * f, l = model->inductance, rise = 0.0;
    cplx lambda = lstub__wideband_lambda(f), dk;
    cplx below = lstub__wideband_at(model->below, lambda), above = lstub__wideband_at(model->above, lambda);
    if (model->disperses) {
        double x = f * model->x_per_f, at_f;
        rise = lstub__microstrip_rise(model->u, model->contrast, x);
        at_f = model->dk + (model->contrast - model->dk) * rise;
        l *= lstub__microstrip_factor(model->u, model->contrast, model->dk, at_f, x) * sqrt(at_f / model->dk);
    }
    dk = dk_mixed(model, below, above, rise);
    *shunt = cplx_mul(cplx_of(0.0, w / (LSTUB_C0 * LSTUB_C0 * l)), dk);
    *series = cplx_of(0.0, w * l);
    if (model->metal > 0.0) {
        double depth = lstub__skin_depth(model->conductor.conductivity, f), rs = 1.0 / (model->conductor.conductivity * depth);
        cplx rough = lstub__roughness(&model->conductor, depth), smooth = cplx_of(rs, rs);
        cplx thin = cplx_inv(cplx_tanh(cplx_of(model->depth / depth, model->depth / depth)));
        cplx sum = cplx_of(model->planes + (model->planes + model->metal) * rough.re + model->metal * thin.re,
                           (model->planes + model->metal) * rough.im + model->metal * thin.im);
        *series = cplx_fma(*series, smooth, sum);
    }
}

void lstub__trace_at(const lstub__trace_model *model, double f, cplx *z, cplx *gamma)
{
    cplx series, shunt;
    lstub__trace_per_metre(model, f, &series, &shunt);
    /* Roots of the factors, each in its quarter of the plane, so that Re z and Re gamma are >= 0 without a choice. */
    cplx a = cplx_sqrt(series), b = cplx_sqrt(shunt);
    *z = cplx_div(a, b);
    *gamma = cplx_mul(a, b);
}

int32_t lstub_trace_line(const lstub_trace *trace, const double *freq, size_t n, double *z, double *gamma, lstub_error *err)
{
    static const lstub__range FREQUENCY = {1e3, 1e12, 0, "Hz"};
    lstub__trace_model model;
    int32_t status = lstub__trace_take(&model, trace, err), each;
    if (status < 0)
        return status;
    if (n > 0 && lstub__need(freq, "freq", err) < 0)
        return LSTUB_E_NULL;
    for (size_t i = 0; i < n; i++)
        if ((each = lstub__check(freq[i], &FREQUENCY, "freq", err)) < 0) {
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
            return each;
        }
    for (size_t i = 0; i < n; i++) {
        cplx zc, g;
        lstub__trace_at(&model, freq[i], &zc, &g);
        if (z != NULL) {
            z[2 * i] = zc.re;
            z[2 * i + 1] = zc.im;
        }
        if (gamma != NULL) {
            gamma[2 * i] = g.re;
            gamma[2 * i + 1] = g.im;
        }
        if (freq[i] > model.f_range && status == LSTUB_OK)
            status = lstub__fail(err, LSTUB_W_RANGE, "freq", (int64_t)i, "item %lu: freq = %.6g Hz: the stated range ends at %.6g Hz: %s",
                                 (unsigned long)i, freq[i], model.f_range, model.f_reason);
    }
    return status;
}
