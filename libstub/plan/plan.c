/* A board's plan: alike jobs found, each case decided once, depths shared out, the drill table made. */
#include "plan/plan.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- which jobs are alike ---------------------------------------------------------------------- */

typedef struct key {               /* a job with its pointers taken out of the structs */
    lstub_via      via;            /* pointers zeroed */
    const lstub_via *arrays;       /* the caller's, for its arrays */
    lstub_signal   signal;
    lstub_criteria criteria;
    uint64_t       hash;
} key;

static uint64_t mix_in(uint64_t hash, const void *data, size_t bytes)
{
    const unsigned char *p = data;
    uint64_t word = 0;
    for (; bytes >= sizeof word; bytes -= sizeof word, p += sizeof word) {
        memcpy(&word, p, sizeof word);
        hash = (hash ^ word) * 0x9e3779b97f4a7c15u;
        hash ^= hash >> 29;
    }
    for (; bytes > 0; bytes--, p++)
        hash = (hash ^ *p) * 0x9e3779b97f4a7c15u;
    return hash;
}

#define ARRAYS 6                   /* that a via points to */

typedef struct array { const void *data; size_t bytes; } array;

static void arrays_of(const lstub_via *via, array *out)
{
    array all[ARRAYS] = {{via->pads, via->pad_count * sizeof *via->pads},
                    {via->antipads, via->antipad_count * sizeof *via->antipads},
                    {via->clear, via->clear_count * sizeof *via->clear},
                    {via->connects, via->connect_count * sizeof *via->connects},
                    {via->backdrills, via->backdrill_count * sizeof *via->backdrills},
                    {via->return_xy, via->return_count < 1 ? 0 : 2 * (size_t)via->return_count * sizeof *via->return_xy}};
    memcpy(out, all, sizeof all);
}

/* Null arrays with a count are left for lstub__via_take to refuse. */
static void make_key(key *k, const lstub_via *via, const lstub_job *job)
{
    array list[ARRAYS];
    memset(k, 0, sizeof *k);
    k->via = *via;
    k->via.pads = k->via.antipads = k->via.clear = NULL;
    k->via.connects = NULL;
    k->via.backdrills = NULL;
    k->via.return_xy = NULL;
    k->arrays = via;
    if (job->signal != NULL)       /* wrong sizes come out when the case is decided */
        lstub__take(&k->signal, sizeof k->signal, job->signal, sizeof k->signal, "signal", NULL);
    if (job->criteria != NULL)
        lstub__take(&k->criteria, sizeof k->criteria, job->criteria, sizeof k->criteria, "criteria", NULL);
    uint64_t hash = mix_in(14695981039346656037u, &k->via, sizeof k->via);
    hash = mix_in(hash, &k->signal, sizeof k->signal);
    hash = mix_in(hash, &k->criteria, sizeof k->criteria);
    arrays_of(via, list);
    for (int i = 0; i < ARRAYS; i++)
        if (list[i].data != NULL)
            hash = mix_in(hash, list[i].data, list[i].bytes);
    k->hash = hash;
}

static int same(const key *a, const key *b)
{
    array x[ARRAYS], y[ARRAYS];
    if (a->hash != b->hash || memcmp(&a->via, &b->via, sizeof a->via) != 0 || memcmp(&a->signal, &b->signal, sizeof a->signal) != 0
        || memcmp(&a->criteria, &b->criteria, sizeof a->criteria) != 0)
        return 0;
    arrays_of(a->arrays, x);
    arrays_of(b->arrays, y);
    for (int i = 0; i < ARRAYS; i++)
        if ((x[i].data == NULL) != (y[i].data == NULL) || (x[i].data != NULL && memcmp(x[i].data, y[i].data, x[i].bytes) != 0))
            return 0;
    return 1;
}

/* ---- taking the caller's structs ---------------------------------------------------------------- */

typedef struct work {              /* what plan_create needs only while it runs */
    const lstub_stackup *stackup;
    const char *jobs;
    size_t      stride;
    lstub__capability capability;
    lstub_model_options options;
    size_t     *job_of;            /* [case]: a job that shows the case */
    uint64_t   *hash_of;           /* [case] */
    uint32_t   *table;             /* open addressing: case + 1, 0 empty */
    size_t      table_size;        /* a power of two */
    lstub__interval *intervals;
    size_t      message_room;
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

/* The case that a job belongs to, *fresh if it is the first of it. */
static uint32_t find_case(work *w, lstub_plan *plan, const key *k, size_t job, int *fresh)
{
    size_t at = (size_t)k->hash & (w->table_size - 1);
    for (; w->table[at] != 0; at = (at + 1) & (w->table_size - 1)) {
        uint32_t c = w->table[at] - 1;
        if (w->hash_of[c] == k->hash) {
            lstub_job other;
            lstub_via via;
            key theirs;
            take_job(w, w->job_of[c], &other, &via, NULL);
            make_key(&theirs, &via, &other);
            if (same(k, &theirs)) {
                *fresh = 0;
                return c;
            }
        }
    }
    uint32_t c = (uint32_t)plan->case_count++;
    w->table[at] = c + 1;
    w->hash_of[c] = k->hash;
    w->job_of[c] = job;
    *fresh = 1;
    return c;
}

static int32_t keep_message(lstub_plan *plan, work *w, lstub__case *c, const lstub_error *message, int64_t *count, lstub_error *err)
{
    if ((size_t)*count == w->message_room) {
        size_t room = w->message_room ? 2 * w->message_room : 16;
        lstub_error *more = lstub__new(&plan->alloc, room, sizeof *more, err);
        if (more == NULL)
            return LSTUB_E_MEMORY;
        if (*count > 0)
            memcpy(more, plan->messages, (size_t)*count * sizeof *more);
        lstub__free(&plan->alloc, plan->messages);
        plan->messages = more;
        w->message_room = room;
    }
    plan->messages[*count] = *message;
    c->message = (*count)++;
    return LSTUB_OK;
}

static int32_t decide_all(lstub_plan *plan, work *w, lstub_error *err)
{
    int64_t messages = 0;
    for (size_t i = 0; i < plan->job_count; i++) {
        lstub_job job;
        lstub_via via;
        lstub_error item;
        int fresh = 1;
        uint32_t c;
        LSTUB_INIT(item);
        int32_t status = take_job(w, i, &job, &via, &item);
        if (status < 0) {                      /* cannot be compared with others: a case of its own */
            c = (uint32_t)plan->case_count++;
            w->job_of[c] = i;
        } else {
            key k;
            make_key(&k, &via, &job);
            c = find_case(w, plan, &k, i, &fresh);
        }
        plan->case_of[i] = c;
        lstub__case *own = &plan->cases[c];
        if (fresh && status < 0) {
            LSTUB_INIT(own->decision);
            own->decision.action = LSTUB_ACTION_REFUSED;
            own->decision.reason = LSTUB_REASON_ERROR;
            own->decision.reason_layer = own->decision.top.group = own->decision.bottom.group = -1;
            own->decision.status = status;
        } else if (fresh) {
            job.via = &via;
            if (lstub__decide(own, w->stackup, &job, &w->capability, &w->options, &item) == LSTUB_E_MEMORY)
                return lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "%s", item.message);
        }
        if (fresh && own->decision.action == LSTUB_ACTION_REFUSED
            && keep_message(plan, w, own, &item, &messages, err) < 0)
            return LSTUB_E_MEMORY;
        own->jobs++;
    }
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
    s->geometries = (int64_t)plan->case_count;
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
    for (w->table_size = 16; w->table_size < 2 * plan->job_count; w->table_size *= 2)
        continue;
    plan->layer_count = stackup->count;
    if ((plan->case_of = lstub__new(a, plan->job_count, sizeof *plan->case_of, err)) == NULL
        || (plan->cases = lstub__new(a, plan->job_count, sizeof *plan->cases, err)) == NULL
        || (plan->layers = lstub__new(a, (size_t)stackup->count, sizeof *plan->layers, err)) == NULL
        || (w->job_of = lstub__new(a, plan->job_count, sizeof *w->job_of, err)) == NULL
        || (w->hash_of = lstub__new(a, plan->job_count, sizeof *w->hash_of, err)) == NULL
        || (w->table = lstub__new(a, w->table_size, sizeof *w->table, err)) == NULL)
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
        if (take_job(w, w->job_of[i], &job, &via, NULL) < 0)
            continue;
        job.via = &via;
        if ((status = lstub__settle(&plan->cases[i], w->stackup, &job, &w->capability, &w->options, err)) < 0)
            return status;
    }
    make_table(plan, w);
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
    w.stackup = stackup;
    w.jobs = (const char *)jobs;
    w.stride = stride;
    status = take_capability(&w.capability, capability, &alloc, err);
    if (status == LSTUB_OK)
        status = build(plan, &w, err);
    lstub__free(&alloc, w.capability.depths);
    lstub__free(&alloc, w.job_of);
    lstub__free(&alloc, w.hash_of);
    lstub__free(&alloc, w.table);
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
