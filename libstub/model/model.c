#include "model/model.h"

#include <math.h>

/* ---- handle ------------------------------------------------------------------------------------ */

int32_t lstub_model_create(const lstub_stackup *stackup, const lstub_via *via, const lstub_model_options *options,
                           const lstub_allocator *allocator, lstub_model **out, lstub_error *err)
{
    lstub_allocator alloc;
    lstub__site site;
    int32_t status;
    if (lstub__need(out, "out", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__allocator(allocator, &alloc, err)) < 0 || (status = lstub__site_make(&site, stackup, via, options, err)) < 0)
        return status;
    site.alloc = alloc;
    lstub_model *m = lstub__new(&alloc, 1, sizeof *m, err);
    if (m == NULL)
        return LSTUB_E_MEMORY;
    m->alloc = alloc;
    m->fidelity = site.fidelity;
    m->z_ref = site.z_ref;
    status = lstub__branches_make(m->branch, &m->count, &site, site.arm[0].length, site.arm[1].length, err);
    for (int32_t i = 0; status == LSTUB_OK && i < m->count; i++)
        status = lstub__branch_estimate(&m->branch[i], &site, err);
    if (status < 0) {
        lstub__branches_done(m->branch, m->count);
        lstub__free(&alloc, m);
        return status;
    }
    int n = 0;
    for (int i = 0; i < 2; i++)
        n += lstub__via_stub(&site.via, lstub__side_of(i), &m->stub[n < 2 ? n : 1]);
    *out = m;
    return LSTUB_OK;
}

void lstub_model_destroy(lstub_model *model)
{
    if (model == NULL)
        return;
    lstub_allocator alloc = model->alloc;
    lstub__branches_done(model->branch, model->count);
    lstub__free(&alloc, model);
}

/* ---- questions --------------------------------------------------------------------------------- */

/* The branches that `stub` names: where they start in the model, and how many. */
static int32_t chosen(const lstub_model *model, int32_t stub, int all, const lstub__branch **branches, int32_t *count, lstub_error *err)
{
    if (lstub__need(model, "model", err) < 0)
        return LSTUB_E_NULL;
    if (all && stub == LSTUB_ALL_STUBS) {
        *branches = model->branch;
        *count = model->count;
        return LSTUB_OK;
    }
    if (model->count == 0)
        return lstub__fail(err, LSTUB_E_NONE, "stub", -1, "stub = %ld: this via has no stub", (long)stub);
    if (stub < 0 || stub >= model->count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "stub", -1, "stub = %ld: must be >= 0 and < %ld%s", (long)stub, (long)model->count,
                           all ? ", or LSTUB_ALL_STUBS" : "");
    *branches = &model->branch[stub];
    *count = 1;
    return LSTUB_OK;
}

int32_t lstub_model_stub_count(const lstub_model *model) { return model == NULL ? 0 : model->count; }

int32_t lstub_model_stub(const lstub_model *model, int32_t stub, lstub_stub *out, lstub_error *err)
{
    const lstub__branch *branch = NULL;
    int32_t count, status = chosen(model, stub, 0, &branch, &count, err);
    if (status < 0)
        return status;
    return lstub__give(&model->stub[stub], sizeof model->stub[stub], out, sizeof model->stub[stub], "out", err);
}

int32_t lstub_model_line(const lstub_model *model, int32_t stub, lstub_stub_line *out, lstub_error *err)
{
    const lstub__branch *branch = NULL;
    int32_t count, status = chosen(model, stub, 0, &branch, &count, err);
    if (status < 0)
        return status;
    lstub_stub_line ours;
    LSTUB_INIT(ours);
    const lstub__line *line = &branch->line;
    double f1 = lstub__branch_notch(branch, model->z_ref, 0.0, LSTUB__F_MAX), root = LSTUB_C0 / (4.0 * branch->length * f1);
    ours.fidelity = model->fidelity;
    if (branch->barrel == NULL) {
        ours.inductance = lstub__line_inductance(line, 1e9).re;
        ours.capacitance = lstub__line_capacitance(line, 1e9).re;
        ours.end_capacitance = line->c_end;
    } else {                     /* the uniform line of the same first notch and the same charge at 100 MHz */
        ours.capacitance = lstub__branch_admittance(branch, 1e8).im / (2.0 * LSTUB_PI * 1e8 * branch->length);
        ours.inductance = root * root / (LSTUB_C0 * ours.capacitance * LSTUB_C0);
    }
    ours.impedance = sqrt(ours.inductance / ours.capacitance);
    ours.dk_line = LSTUB_C0 * ours.inductance * LSTUB_C0 * ours.capacitance;
    ours.dk_effective = root * root;
    ours.stated_error = lstub__branch_notch_error(branch, model->z_ref, f1);
    ours.f_range = branch->f_range;
    return lstub__give(&ours, sizeof ours, out, sizeof ours, "out", err);
}

typedef void evaluate(const lstub_model *model, const lstub__branch *branches, int32_t count, double f, double *out);

static void put(cplx z, double *out)
{
    out[0] = z.re;
    out[1] = z.im;
}

static void put_zin(const lstub_model *model, const lstub__branch *branches, int32_t count, double f, double *out)
{
    (void)model;
    put(cplx_div(cplx_of(1.0, 0.0), lstub__branches_admittance(branches, count, f)), out);
}

static void put_s21(const lstub_model *model, const lstub__branch *branches, int32_t count, double f, double *out)
{
    cplx y = cplx_scale(lstub__branches_admittance(branches, count, f), model->z_ref);
    put(cplx_div(cplx_of(2.0, 0.0), cplx_add(cplx_of(2.0, 0.0), y)), out);
}

static void put_loss(const lstub_model *model, const lstub__branch *branches, int32_t count, double f, double *out)
{
    out[0] = lstub__branches_loss_db(branches, count, model->z_ref, f);
}

static double range_of(const lstub__branch *branches, int32_t count)
{
    double f = HUGE_VAL;
    for (int32_t i = 0; i < count; i++)
        f = fmin(f, branches[i].f_range);
    return f;
}

/* A question at many frequencies: every one answered, failed ones NaN. */
static int32_t at_frequencies(const lstub_model *model, int32_t stub, const double *freq, size_t n, evaluate *what, int width,
                              int needs_stub, double *out, int32_t *status, lstub_error *err)
{
    lstub__range band = {LSTUB__F_MIN, LSTUB__F_MAX, 0, "Hz"};
    const lstub__branch *branches = NULL;
    int32_t count, result = chosen(model, stub, 1, &branches, &count, err);
    if (result < 0)
        return result;
    if (needs_stub && count == 0)
        return lstub__fail(err, LSTUB_E_NONE, "stub", -1, "stub: this via has no stub, its impedance is infinite");
    if (n > 0 && (lstub__need(freq, "freq", err) < 0 || lstub__need(out, "out", err) < 0))
        return LSTUB_E_NULL;
    lstub__batch batch = {0, 0};
    double top = range_of(branches, count);
    for (int32_t i = 0; i < count; i++)
        band.high = fmin(band.high, branches[i].f_top);
    for (size_t i = 0; i < n; i++) {
        lstub_error item;
        LSTUB_INIT(item);
        int32_t one = lstub__check(freq[i], &band, "freq", &item);
        if (one < 0) {
            for (int k = 0; k < width; k++)
                out[i * (size_t)width + (size_t)k] = NAN;
        } else {
            what(model, branches, count, freq[i], out + i * (size_t)width);
            one = freq[i] > top ? LSTUB_W_RANGE : LSTUB_OK;
        }
        if (status != NULL)
            status[i] = one;
        lstub__batch_add(&batch, one, (int64_t)i, &item, err);
    }
    if (batch.result > 0)
        lstub__fail(err, batch.result, "freq", -1, "freq: beyond the stated range of this model, which ends at %.6g Hz", top);
    return batch.result;
}

int32_t lstub_model_zin(const lstub_model *model, int32_t stub, const double *freq, size_t n, double *zin, int32_t *status,
                        lstub_error *err)
{
    return at_frequencies(model, stub, freq, n, put_zin, 2, 1, zin, status, err);
}

int32_t lstub_model_s21(const lstub_model *model, int32_t stub, const double *freq, size_t n, double *s21, int32_t *status,
                        lstub_error *err)
{
    return at_frequencies(model, stub, freq, n, put_s21, 2, 0, s21, status, err);
}

int32_t lstub_model_added_loss(const lstub_model *model, int32_t stub, const double *freq, size_t n, double *loss,
                               int32_t *status, lstub_error *err)
{
    return at_frequencies(model, stub, freq, n, put_loss, 1, 0, loss, status, err);
}
