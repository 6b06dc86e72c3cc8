/* What a plan answers: decisions, rows, totals, and the words for them. */
#include "plan/plan.h"

#include <math.h>
#include <string.h>

size_t lstub_plan_count(const lstub_plan *plan) { return plan == NULL ? 0 : plan->job_count; }

int32_t lstub_plan_group_count(const lstub_plan *plan) { return plan == NULL ? 0 : plan->summary.groups; }

static int32_t case_at(const lstub_plan *plan, size_t index, const lstub__case **out, lstub_error *err)
{
    if (lstub__need(plan, "plan", err) < 0)
        return LSTUB_E_NULL;
    if (index >= plan->job_count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "index", -1, "index = %lu: must be >= 0 and < %lu jobs", (unsigned long)index,
                           (unsigned long)plan->job_count);
    *out = &plan->cases[plan->case_of[index]];
    return LSTUB_OK;
}

int32_t lstub_plan_decision(const lstub_plan *plan, size_t index, lstub_decision *out, lstub_error *err)
{
    const lstub__case *c = NULL;
    int32_t status = case_at(plan, index, &c, err);
    return status < 0 ? status : lstub__give(&c->decision, sizeof c->decision, out, sizeof c->decision, "out", err);
}

int32_t lstub_plan_group(const lstub_plan *plan, int32_t index, lstub_drill_group *out, lstub_error *err)
{
    if (lstub__need(plan, "plan", err) < 0)
        return LSTUB_E_NULL;
    if (index < 0 || index >= plan->summary.groups)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "index", -1, "index = %ld: must be >= 0 and < %ld rows", (long)index,
                           (long)plan->summary.groups);
    return lstub__give(&plan->groups[index], sizeof *plan->groups, out, sizeof *plan->groups, "out", err);
}

int32_t lstub_plan_totals(const lstub_plan *plan, lstub_plan_summary *out, lstub_error *err)
{
    if (lstub__need(plan, "plan", err) < 0)
        return LSTUB_E_NULL;
    return lstub__give(&plan->summary, sizeof plan->summary, out, sizeof plan->summary, "out", err);
}

const char *lstub_action_name(int32_t action)
{
    static const char *const names[] = {"not judged", "keep", "drill top", "drill bottom", "drill both", "cannot", "refused"};
    return action >= 0 && action < (int32_t)(sizeof names / sizeof names[0]) ? names[action] : "unknown action";
}

const char *lstub_reason_name(int32_t reason)
{
    static const char *const names[] = {
        "no signal", "no stub", "passes", "fails", "limit too short", "no room to drill", "side not allowed", "wall too near to copper",
        "too deep for the bit", "no allowed depth fits", "pin needs the barrel", "does not reach the surface", "drilled already",
        "in error", "connects on one layer only"};
    return reason >= 0 && reason < (int32_t)(sizeof names / sizeof names[0]) ? names[reason] : "unknown reason";
}

/* ---- sentences ---------------------------------------------------------------------------------- */

typedef struct sentence { char *text; size_t bytes, used; } sentence;

static void say(sentence *s, const char *format, ...) LSTUB_PRINTF(2, 3);

static void say(sentence *s, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    lstub__vformat(s->text + s->used, s->bytes - s->used, format, args);
    va_end(args);
    s->used += strlen(s->text + s->used);
}

static const char *layer_name(const lstub_plan *plan, int32_t layer)
{
    return layer >= 0 && layer < plan->layer_count ? plan->layers[layer].text : "?";
}

static const char *side_name(int32_t side) { return side == LSTUB_SIDE_TOP ? "top" : "bottom"; }

/* "first notch 12.9 GHz is 0.97 x Nyquist (2 wanted), adds 3.1 dB (0.3 allowed)" */
static void say_numbers(sentence *s, const lstub__case *c)
{
    const lstub_margin *m = &c->decision.before;
    if (m->f1 < HUGE_VAL)
        say(s, "first notch %.4g GHz is %.3g x Nyquist", m->f1 * 1e-9, m->notch_over_nyquist);
    else
        say(s, "no notch below 1000 GHz");
    if (c->notch_ratio > 0.0)
        say(s, " (%.4g wanted)", c->notch_ratio);
    say(s, ", adds %.3g dB", m->added_loss_db);
    if (c->loss_db > 0.0)
        say(s, " (%.4g allowed)", c->loss_db);
}

static void say_cut(sentence *s, const lstub_plan *plan, const char *side, const lstub_drill_cut *cut)
{
    if (cut->drilled)
        say(s, "; drill from the %s %.4f mm deep, clear of %s", side, cut->depth * 1e3, layer_name(plan, cut->must_not_cut));
}

static void say_cannot(sentence *s, const lstub_plan *plan, const lstub_decision *d)
{
    const char *side = side_name(d->reason_side);
    say(s, "; %s: ", side);
    switch (d->reason) {
    case LSTUB_REASON_LIMIT_TOO_SHORT:
        say(s, "residual may be %.4f mm, %.4f mm is the limit", d->reason_value * 1e3, d->reason_limit * 1e3);
        break;
    case LSTUB_REASON_NO_ROOM:
        say(s, "only %.4f mm of barrel, the drill needs %.4f mm left", d->reason_value * 1e3, d->reason_limit * 1e3);
        break;
    case LSTUB_REASON_WALL:
        say(s, "drill wall %.4f mm from copper on %s, %.4f mm wanted", d->reason_value * 1e3, layer_name(plan, d->reason_layer),
            d->reason_limit * 1e3);
        break;
    case LSTUB_REASON_ASPECT:
        say(s, "depth is up to %.3g bit diameters, %.3g allowed", d->reason_value, d->reason_limit);
        break;
    case LSTUB_REASON_DEPTHS:
        say(s, "no allowed depth from %.4f to %.4f mm", d->reason_value * 1e3, d->reason_limit * 1e3);
        break;
    case LSTUB_REASON_PIN:
        if (d->reason_limit > 0.0)
            say(s, "the pin needs %.4f mm of barrel", d->reason_limit * 1e3);
        else
            say(s, "a soldered pin fills the hole");
        break;
    default:
        say(s, "%s", lstub_reason_name(d->reason));
    }
}

int32_t lstub_plan_reason(const lstub_plan *plan, size_t index, char *text, size_t bytes, lstub_error *err)
{
    const lstub__case *c = NULL;
    int32_t status = case_at(plan, index, &c, err);
    if (status < 0)
        return status;
    if (lstub__need(bytes > 0 ? text : NULL, "text", err) < 0)
        return LSTUB_E_NULL;
    const lstub_decision *d = &c->decision;
    char line[2 * LSTUB_REASON_MAX + 2 * LSTUB_NAME_MAX];
    sentence s = {line, sizeof line, 0};
    line[0] = '\0';
    if (d->action == LSTUB_ACTION_REFUSED) {
        say(&s, "%s", plan->messages[c->message].message);
    } else if (d->reason == LSTUB_REASON_NO_SIGNAL) {
        say(&s, "no signal assigned");
    } else if (d->reason == LSTUB_REASON_ONE_LAYER) {
        say(&s, "connects on %s only: no path to judge", layer_name(plan, d->reason_layer));
    } else if (d->reason == LSTUB_REASON_NO_STUB) {
        say(&s, "no stub");
    } else {
        say_numbers(&s, c);
        say_cut(&s, plan, "top", &d->top);
        say_cut(&s, plan, "bottom", &d->bottom);
        if (d->action == LSTUB_ACTION_CANNOT)
            say_cannot(&s, plan, d);
    }
    if (s.used >= LSTUB_REASON_MAX)
        line[s.used = LSTUB_REASON_MAX - 1] = '\0';
    if (s.used >= bytes) {
        memcpy(text, line, bytes - 1);
        text[bytes - 1] = '\0';
        return lstub__fail(err, LSTUB_W_CAPACITY, "bytes", -1, "bytes = %lu: the sentence needs %lu", (unsigned long)bytes,
                           (unsigned long)(s.used + 1));
    }
    memcpy(text, line, s.used + 1);
    return LSTUB_OK;
}
