/* A board's plan: alike jobs found, each case decided once, depths shared out, the drill table made. */
#include "plan/alike.h"
#include "plan/plan.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- taking the caller's structs ---------------------------------------------------------------- */

typedef struct work {              /* what plan_create needs only while it runs */
    const lstub_stackup *stackup;
    const char *jobs;
    size_t      stride;
    lstub__capability capability;
    lstub_model_options options;
    lstub__table cases;            /* jobs alike in everything */
    lstub__table circuits;         /* jobs alike in what the model and the criteria see */
    lstub__circuit *circuit;       /* [number in circuits] */
    uint32_t   *circuit_of;        /* [case] */
    lstub__interval *intervals;
    size_t      message_room, case_room, circuit_room;
} work;

static int32_t take_job(const work *w, size_t index, lstub_job *job, lstub_via *via, lstub_error *err)
{
    int32_t status = lstub__take(job, sizeof *job, w->jobs + index * w->stride, sizeof *job, "job", err);
    if (status < 0)
        return status;
    LSTUB_INIT(*via);
    if (job->via == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "via", -1, "via = null: a job needs one");
    if ((status = lstub__take(via, sizeof *via, job->via, sizeof *via, "via", err)) < 0
        || (status = lstub__via_counts(via, err)) < 0)
        return status;
    if (job->signal != NULL && job->criteria == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "criteria", -1, "criteria = null: a job with a signal needs them");
    return LSTUB_OK;
}

static int by_value(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static int32_t take_depths(lstub__capability *out, const lstub_allocator *alloc, lstub_error *err)
{
    static const lstub__range DEPTH = {0.0, 0.1, 1, "m"};
    if (out->in.depth_count == 0)
        return LSTUB_OK;
    if (out->in.depths == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "depths", -1, "depths = null: must point to %lu depths", (unsigned long)out->in.depth_count);
    for (size_t i = 0; i < out->in.depth_count; i++) {
        int32_t status = lstub__check(out->in.depths[i], &DEPTH, "depths", err);
        if (status < 0) {
            lstub__fail_where(err, (int64_t)i, "depths[%lu]", (unsigned long)i);
            return status;
        }
    }
    out->depths = lstub__new(alloc, out->in.depth_count, sizeof *out->depths, err);
    if (out->depths == NULL)
        return LSTUB_E_MEMORY;
    memcpy(out->depths, out->in.depths, out->in.depth_count * sizeof *out->depths);
    qsort(out->depths, out->in.depth_count, sizeof *out->depths, by_value);
    return LSTUB_OK;
}

static int32_t take_capability(lstub__capability *out, const lstub_capability *theirs, const lstub_allocator *alloc, lstub_error *err)
{
    static const lstub__range LENGTH = {0.0, 0.1, 0, "m"}, RATIO = {0.0, 1000.0, 0, ""};
    lstub_capability *in = &out->in;
    int32_t status = lstub__take(in, sizeof *in, theirs, sizeof *in, "capability", err);
    if (status < 0)
        return status;
    if (in->sides == 0)
        in->sides = LSTUB_SIDE_BOTH;
    if (in->sides < LSTUB_SIDE_TOP || in->sides > LSTUB_SIDE_BOTH)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "sides", -1, "sides = %ld: must be 0 or one of LSTUB_SIDE_...", (long)in->sides);
    if (in->tolerance_method != LSTUB_TOLERANCE_WORST && in->tolerance_method != LSTUB_TOLERANCE_RSS)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "tolerance_method", -1, "tolerance_method = %ld: must be one of LSTUB_TOLERANCE_...",
                           (long)in->tolerance_method);
    if ((status = lstub__check(in->depth_tolerance, &LENGTH, "depth_tolerance", err)) < 0
        || (status = lstub__check(in->cut_clearance, &LENGTH, "cut_clearance", err)) < 0
        || (status = lstub__check(in->residual_min, &LENGTH, "residual_min", err)) < 0
        || (status = lstub__check(in->residual_target, &LENGTH, "residual_target", err)) < 0
        || (status = lstub__check(in->bit_oversize, &LENGTH, "bit_oversize", err)) < 0
        || (status = lstub__check(in->wall_clearance, &LENGTH, "wall_clearance", err)) < 0
        || (status = lstub__check(in->aspect_ratio, &RATIO, "aspect_ratio", err)) < 0)
        return status;
    return take_depths(out, alloc, err);
}

/* ---- cases -------------------------------------------------------------------------------------- */

static void key_of_case(const void *context, size_t job, lstub_via *via, lstub__key *key)
{
    lstub_job theirs;
    take_job(context, job, &theirs, via, NULL);
    lstub__key_make(key, via, &theirs);
}

/* Copper beside the hole and the pin in it matter to the drill, not to the model. */
static void key_of_circuit(const void *context, size_t job, lstub_via *via, lstub__key *key)
{
    lstub_job theirs;
    take_job(context, job, &theirs, via, NULL);
    via->clear = NULL;
    via->clear_count = 0;
    via->pin_side = 0;
    via->pin_length = 0.0;
    lstub__key_make(key, via, &theirs);
}

/* Makes room for item `count` of an array; a status. */
static int32_t reserve(void *array, const lstub_allocator *alloc, size_t count, size_t *room, size_t bytes, lstub_error *err)
{
    void *old, *moved;
    memcpy(&old, array, sizeof old);
    if ((moved = lstub__grow(alloc, old, count, room, bytes, err)) == NULL)
        return LSTUB_E_MEMORY;
    memcpy(array, &moved, sizeof moved);
    return LSTUB_OK;
}

static int32_t keep_message(lstub_plan *plan, work *w, lstub__case *c, const lstub_error *message, int64_t *count, lstub_error *err)
{
    if (reserve(&plan->messages, &plan->alloc, (size_t)*count, &w->message_room, sizeof *plan->messages, err) < 0)
        return LSTUB_E_MEMORY;
    plan->messages[*count] = *message;
    c->message = (*count)++;
    return LSTUB_OK;
}

/* A case of its own, decided: a job that could be taken. */
static int32_t decide_case(lstub_plan *plan, work *w, uint32_t number, size_t i, lstub_job *job, const lstub_via *via, lstub_error *item)
{
    lstub__key key;
    lstub_via bare;
    int fresh;
    key_of_circuit(w, i, &bare, &key);
    if (reserve(&w->circuit, &plan->alloc, w->circuits.count, &w->circuit_room, sizeof *w->circuit, item) < 0)
        return LSTUB_E_MEMORY;
    w->circuit_of[number] = lstub__table_find(&w->circuits, &key, i, key_of_circuit, w, &fresh);
    job->via = via;
    return lstub__decide(&plan->cases[number], &w->circuit[w->circuit_of[number]], w->stackup, job, &w->capability, &w->options, item);
}

static void refuse_case(lstub__case *own, int32_t status)
{
    lstub_decision *d = &own->decision;
    LSTUB_INIT(*d);
    d->action = LSTUB_ACTION_REFUSED;
    d->reason = LSTUB_REASON_ERROR;
    d->reason_layer = d->top.group = d->bottom.group = -1;
    d->status = status;
}

static int32_t decide_all(lstub_plan *plan, work *w, lstub_error *err)
{
    int64_t messages = 0;
    for (size_t i = 0; i < plan->job_count; i++) {
        lstub_job job;
        lstub_via via, again;
        lstub_error item;
        lstub__key key;
        int fresh = 1;
        uint32_t c;
        LSTUB_INIT(item);
        if (reserve(&plan->cases, &plan->alloc, w->cases.count, &w->case_room, sizeof *plan->cases, err) < 0)
            return LSTUB_E_MEMORY;
        int32_t status = take_job(w, i, &job, &via, &item);
        if (status < 0) {                      /* cannot be compared with others: a case of its own */
            c = w->cases.count++;
            w->cases.job[c] = i;
            refuse_case(&plan->cases[c], status);
        } else {
            key_of_case(w, i, &again, &key);
            c = lstub__table_find(&w->cases, &key, i, key_of_case, w, &fresh);
            if (fresh && decide_case(plan, w, c, i, &job, &via, &item) == LSTUB_E_MEMORY)
                return lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "%s", item.message);
        }
        plan->case_of[i] = c;
        lstub__case *own = &plan->cases[c];
        if (fresh && own->decision.action == LSTUB_ACTION_REFUSED
            && keep_message(plan, w, own, &item, &messages, err) < 0)
            return LSTUB_E_MEMORY;
        own->jobs++;
    }
    plan->case_count = w->cases.count;
    return LSTUB_OK;
}

/* ---- depths and drill table --------------------------------------------------------------------- */

static lstub_drill_cut *cut_of(lstub__case *c, int arm) { return arm == 0 ? &c->decision.top : &c->decision.bottom; }

static int32_t share_depths(lstub_plan *plan, work *w, int arm)
{
    size_t n = 0;
    for (size_t i = 0; i < plan->case_count; i++) {
        lstub_drill_cut *cut = cut_of(&plan->cases[i], arm);
        if (!cut->drilled)
            continue;
        lstub__interval *one = &w->intervals[n++];
        one->low = cut->depth_least;
        one->high = cut->depth_most;
        one->aim = plan->cases[i].aim[arm];
        one->weight = (double)plan->cases[i].jobs;
        one->owner = i;
    }
    int32_t depths = lstub__stab(w->intervals, n, &w->capability);
    for (size_t i = 0; i < n; i++)
        cut_of(&plan->cases[w->intervals[i].owner], arm)->depth = w->intervals[i].point;
    return depths;
}

static int by_group(const void *a, const void *b)
{
    const lstub_drill_group *x = a, *y = b;
    if (x->side != y->side)
        return x->side < y->side ? -1 : 1;
    if (x->depth != y->depth)
        return x->depth < y->depth ? -1 : 1;
    if (x->diameter != y->diameter)
        return x->diameter < y->diameter ? -1 : 1;
    return (x->must_not_cut > y->must_not_cut) - (x->must_not_cut < y->must_not_cut);
}

static void add_rows(lstub_plan *plan, const work *w, int arm)
{
    for (size_t i = 0; i < plan->case_count; i++) {
        const lstub_drill_cut *cut = cut_of(&plan->cases[i], arm);
        if (!cut->drilled)
            continue;
        lstub_drill_group *row = &plan->groups[plan->summary.groups++];
        LSTUB_INIT(*row);
        row->side = lstub__side_of(arm);
        row->from_layer = arm == 0 ? w->stackup->first_copper : w->stackup->last_copper;
        row->must_not_cut = cut->must_not_cut;
        row->diameter = cut->diameter;
        row->depth = cut->depth;
        row->tolerance = w->capability.in.depth_tolerance;
        row->residual_most = cut->residual_most;
        row->hits = (int32_t)plan->cases[i].jobs;
    }
}

/* One row a case at first; sorted, and equal ones joined. */
static void make_table(lstub_plan *plan, const work *w)
{
    add_rows(plan, w, 0);
    add_rows(plan, w, 1);
    int32_t rows = 0;
    qsort(plan->groups, (size_t)plan->summary.groups, sizeof *plan->groups, by_group);
    for (int32_t i = 0; i < plan->summary.groups; i++) {
        lstub_drill_group *last = rows > 0 ? &plan->groups[rows - 1] : NULL, *next = &plan->groups[i];
        if (last != NULL && by_group(last, next) == 0) {
            last->hits += next->hits;
            last->residual_most = fmax(last->residual_most, next->residual_most);
        } else {
            plan->groups[rows++] = *next;
        }
    }
    plan->summary.groups = rows;
    for (size_t i = 0; i < plan->case_count; i++)
        for (int arm = 0; arm < 2; arm++) {
            lstub_drill_cut *cut = cut_of(&plan->cases[i], arm);
            lstub_drill_group like;
            like.side = lstub__side_of(arm);
            like.depth = cut->depth;
            like.diameter = cut->diameter;
            like.must_not_cut = cut->must_not_cut;
            lstub_drill_group *row = cut->drilled ? bsearch(&like, plan->groups, (size_t)rows, sizeof *plan->groups, by_group) : NULL;
            cut->group = row == NULL ? -1 : (int32_t)(row - plan->groups);
        }
}

static void add_up(lstub_plan *plan)
{
    lstub_plan_summary *s = &plan->summary;
    s->worst_notch_over_nyquist = HUGE_VAL;
    s->vias = (int64_t)plan->job_count;
    for (size_t i = 0; i < plan->case_count; i++) {
        const lstub_decision *d = &plan->cases[i].decision;
        int64_t n = plan->cases[i].jobs;
        int64_t *count[] = {&s->not_judged, &s->keep, &s->drill_top, &s->drill_bottom, &s->drill_both, &s->cannot, &s->refused};
        *count[d->action] += n;
        if (d->action == LSTUB_ACTION_NOT_JUDGED || d->action == LSTUB_ACTION_REFUSED)
            continue;
        s->outside_range += d->status > 0 ? n : 0;
        s->worst_notch_over_nyquist = fmin(s->worst_notch_over_nyquist, d->after.notch_over_nyquist);
        s->worst_added_loss_db = fmax(s->worst_added_loss_db, d->after.added_loss_db);
    }
}

/* ---- handle ------------------------------------------------------------------------------------- */

static int32_t make_rooms(lstub_plan *plan, work *w, const lstub_stackup *stackup, lstub_error *err)
{
    const lstub_allocator *a = &plan->alloc;
    plan->layer_count = stackup->count;
    if ((plan->case_of = lstub__new(a, plan->job_count, sizeof *plan->case_of, err)) == NULL
        || (plan->layers = lstub__new(a, (size_t)stackup->count, sizeof *plan->layers, err)) == NULL
        || lstub__table_make(&w->cases, a, plan->job_count, err) < 0 || lstub__table_make(&w->circuits, a, plan->job_count, err) < 0
        || (w->circuit_of = lstub__new(a, plan->job_count, sizeof *w->circuit_of, err)) == NULL)
        return LSTUB_E_MEMORY;
    for (int32_t i = 0; i < stackup->count; i++)
        strcpy(plan->layers[i].text, stackup->layer[i].name);    /* at most LSTUB_NAME_MAX: checked there */
    return LSTUB_OK;
}

static int32_t build(lstub_plan *plan, work *w, lstub_error *err)
{
    int32_t status = make_rooms(plan, w, w->stackup, err);
    if (status == LSTUB_OK)
        status = decide_all(plan, w, err);
    if (status < 0)
        return status;
    if ((w->intervals = lstub__new(&plan->alloc, plan->case_count, sizeof *w->intervals, err)) == NULL
        || (plan->groups = lstub__new(&plan->alloc, 2 * plan->case_count, sizeof *plan->groups, err)) == NULL)
        return LSTUB_E_MEMORY;
    plan->summary.depths_top = share_depths(plan, w, 0);
    plan->summary.depths_bottom = share_depths(plan, w, 1);
    for (size_t i = 0; i < plan->case_count; i++) {
        lstub_job job;
        lstub_via via;
        if (take_job(w, w->cases.job[i], &job, &via, NULL) < 0)
            continue;
        job.via = &via;
        if ((status = lstub__settle(&plan->cases[i], &w->circuit[w->circuit_of[i]], w->stackup, &job, &w->capability, &w->options, err)) < 0)
            return status;
    }
    make_table(plan, w);
    plan->summary.geometries = w->circuits.count;
    add_up(plan);
    return LSTUB_OK;
}

int32_t lstub_plan_create(const lstub_stackup *stackup, const lstub_job *jobs, size_t count, size_t stride,
                          const lstub_capability *capability, const lstub_model_options *options, const lstub_allocator *allocator,
                          lstub_plan **out, lstub_error *err)
{
    lstub_allocator alloc;
    work w;
    int32_t status;
    memset(&w, 0, sizeof w);
    if (lstub__need(stackup, "stackup", err) < 0 || lstub__need(out, "out", err) < 0 || (count > 0 && lstub__need(jobs, "jobs", err) < 0))
        return LSTUB_E_NULL;
    if (count > INT32_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %lu jobs: must be <= %ld", (unsigned long)count, (long)INT32_MAX);
    if ((count > 0 && (status = lstub__stride(stride, sizeof *jobs, "jobs", err)) < 0)
        || (status = lstub__allocator(allocator, &alloc, err)) < 0
        || (status = lstub__options_take(&w.options, options, err)) < 0)
        return status;
    lstub_plan *plan = lstub__new(&alloc, 1, sizeof *plan, err);
    if (plan == NULL)
        return LSTUB_E_MEMORY;
    plan->alloc = alloc;
    plan->job_count = count;
    LSTUB_INIT(plan->summary);
    w.options.allocator = &plan->alloc;
    w.stackup = stackup;
    w.jobs = (const char *)jobs;
    w.stride = stride;
    status = take_capability(&w.capability, capability, &alloc, err);
    if (status == LSTUB_OK)
        status = build(plan, &w, err);
    lstub__free(&alloc, w.capability.depths);
    lstub__table_free(&w.cases, &alloc);
    lstub__table_free(&w.circuits, &alloc);
    lstub__free(&alloc, w.circuit);
    lstub__free(&alloc, w.circuit_of);
    lstub__free(&alloc, w.intervals);
    if (status < 0) {
        lstub_plan_destroy(plan);
        return status;
    }
    *out = plan;
    return LSTUB_OK;
}

void lstub_plan_destroy(lstub_plan *plan)
{
    if (plan == NULL)
        return;
    lstub_allocator alloc = plan->alloc;
    lstub__free(&alloc, plan->case_of);
    lstub__free(&alloc, plan->cases);
    lstub__free(&alloc, plan->groups);
    lstub__free(&alloc, plan->messages);
    lstub__free(&alloc, plan->layers);
    lstub__free(&alloc, plan);
}
