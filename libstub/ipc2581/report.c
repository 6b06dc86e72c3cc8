#include "ipc2581/report.h"

#include "base/base.h"
#include "ipc2581/number.h"
#include "ipc2581/outfile.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static int32_t check_groups(const lstub_board *board, const lstub_plan *plan, lstub_error *err)
{
    int32_t i, groups = lstub_plan_group_count(plan), layers = lstub_stackup_count(board->stackup);
    for (i = 0; i < groups; i++) {
        lstub_drill_group group;
        int32_t status;
        LSTUB_INIT(group);
        status = lstub_plan_group(plan, i, &group, err);
        if (status < 0)
            return status;
        if (group.from_layer < 0 || group.from_layer >= layers || group.must_not_cut < 0 || group.must_not_cut >= layers)
            return lstub__fail(err, LSTUB_E_ARGUMENT, "plan", i, "plan with a drill to layer %ld: this board has %ld layers",
                               (long)group.must_not_cut, (long)layers);
    }
    return LSTUB_OK;
}

/* Whether the decision fits the signal that the hole had when the board was read. A plan may come from other rules: then
   rates are the plan's own, and names are left out rather than wrong. */
static int same_signal(const lstub_board *board, const board_hole *hole, const lstub_decision *d)
{
    lstub_signal signal;
    LSTUB_INIT(signal);
    if (d->reason == LSTUB_REASON_NO_SIGNAL || hole->signal < 0)
        return d->reason == LSTUB_REASON_NO_SIGNAL && hole->signal < 0;
    return lstub_rules_signal(board->rules, hole->signal, NULL, &signal, NULL, NULL) == LSTUB_OK
           && (!(d->before.nyquist > 0.0) || 2.0 * d->before.nyquist == signal.symbol_rate);
}

int32_t lstub__report_open(lstub__report *report, const lstub_board *board, const lstub_plan *plan, lstub_error *err)
{
    size_t i, jobs;
    int32_t status;
    if (board == NULL || plan == NULL)
        return lstub__fail(err, LSTUB_E_NULL, board == NULL ? "board" : "plan", -1, "%s = null: must not be null",
                           board == NULL ? "board" : "plan");
    jobs = lstub_plan_count(plan);
    if (jobs != board->hole_count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "plan", -1, "plan of %lu vias: this board has %lu plated holes",
                           (unsigned long)jobs, (unsigned long)board->hole_count);
    status = check_groups(board, plan, err);
    report->board = board;
    report->plan = plan;
    report->named = 1;
    for (i = 0; i < jobs && status == LSTUB_OK && report->named; i++) {
        lstub_decision d;
        LSTUB_INIT(d);
        status = lstub_plan_decision(plan, i, &d, err);
        report->named = same_signal(board, &board->holes[i], &d);
    }
    return status;
}

int32_t lstub__report_row(const lstub__report *report, size_t index, lstub__row *row, lstub_error *err)
{
    lstub_signal signal;
    int32_t status;
    row->hole = &report->board->holes[index];
    row->signal = "";
    row->symbol_rate = NAN;
    row->levels = 0;
    LSTUB_INIT(row->decision);
    status = lstub_plan_decision(report->plan, index, &row->decision, err);
    if (status < 0)
        return status;
    row->judged = row->decision.action != LSTUB_ACTION_NOT_JUDGED && row->decision.action != LSTUB_ACTION_REFUSED;
    if (row->decision.before.nyquist > 0.0)
        row->symbol_rate = 2.0 * row->decision.before.nyquist;
    LSTUB_INIT(signal);
    if (report->named && row->hole->signal >= 0
        && lstub_rules_signal(report->board->rules, row->hole->signal, &row->signal, &signal, NULL, NULL) == LSTUB_OK) {
        row->symbol_rate = signal.symbol_rate;
        row->levels = signal.levels != 0 ? signal.levels : 2;
    }
    return LSTUB_OK;
}

const char *lstub__report_layer(const lstub_board *board, int32_t layer)
{
    lstub_layer out;
    LSTUB_INIT(out);
    return lstub_stackup_layer(board->stackup, layer, &out, NULL) < 0 ? "" : out.name;
}

/* ---- cells ---------------------------------------------------------------------------------------
** Quoted as in RFC 4180, and so is a text that begins like a formula (= + - @): nets are called +3V3, and a mark put
** before them would change their name. Lines end with a line feed. No value, no text: nan and inf never appear. */

typedef struct table {
    lstub__outfile *out;
    int             column;
} table;

static void separate(table *t)
{
    if (t->column++ > 0)
        lstub__out_text(t->out, ",");
}

static void text_cell(table *t, const char *text)
{
    const char *quote;
    size_t length = strlen(text);
    separate(t);
    if (length == 0 || (strpbrk(text, ",\"\r\n\t") == NULL && strchr("=+-@ ", text[0]) == NULL && text[length - 1] != ' ')) {
        lstub__out_text(t->out, text);
        return;
    }
    lstub__out_text(t->out, "\"");
    for (; (quote = strchr(text, '"')) != NULL; text = quote + 1) {
        lstub__out_bytes(t->out, text, (size_t)(quote + 1 - text));
        lstub__out_text(t->out, "\"");
    }
    lstub__out_text(t->out, text);
    lstub__out_text(t->out, "\"");
}

static void number_cell(table *t, double value, int digits)
{
    char text[LSTUB__NUMBER_MAX];
    separate(t);
    lstub__out_text(t->out, lstub__significant(text, value, digits));
}

static void integer_cell(table *t, long value)
{
    char text[LSTUB__NUMBER_MAX];
    snprintf(text, sizeof text, "%ld", value);
    separate(t);
    lstub__out_text(t->out, text);
}

static void empty_cells(table *t, int count)
{
    while (count-- > 0)
        separate(t);
}

static void end_row(table *t)
{
    lstub__out_text(t->out, "\n");
    t->column = 0;
}

/* ---- plan.csv ------------------------------------------------------------------------------------ */

static const char plan_head[] =
    "hole,net,padstack,x_mm,y_mm,signal,symbol_rate_GBd,levels,start_layer,end_layer,connects,stub_top_mm,stub_bottom_mm,"
    "before_first_notch_GHz,before_notch_over_nyquist,before_added_loss_dB,before_pass,action,"
    "bottom_must_not_cut,bottom_depth_mm,bottom_residual_mm,bottom_residual_most_mm,bottom_limit_mm,bottom_bit_mm,bottom_drill_row,"
    "top_must_not_cut,top_depth_mm,top_residual_mm,top_residual_most_mm,top_limit_mm,top_bit_mm,top_drill_row,"
    "after_first_notch_GHz,after_notch_over_nyquist,after_added_loss_dB,after_pass,model_status,reason\n";

static void span_cells(table *t, const lstub_board *board, const lstub_via *via)
{
    int32_t first = via->start_layer, last = via->end_layer;
    char joined[LSTUB_LAYERS_MAX * (LSTUB_NAME_MAX + 1) + 1] = "";
    size_t i, used = 0;
    if (first == 0 && last == 0) {   /* through */
        lstub_stackup_copper(board->stackup, 0, &first, NULL);
        lstub_stackup_copper(board->stackup, lstub_stackup_copper_count(board->stackup) - 1, &last, NULL);
    }
    text_cell(t, lstub__report_layer(board, first));
    text_cell(t, lstub__report_layer(board, last));
    for (i = 0; i < via->connect_count && used + LSTUB_NAME_MAX + 2 < sizeof joined; i++)
        used += (size_t)snprintf(joined + used, sizeof joined - used, "%s%s", i > 0 ? "+" : "",
                                 lstub__report_layer(board, via->connects[i]));
    text_cell(t, joined);
}

static void stub_cell(table *t, double length) { number_cell(t, length > 0.0 ? length * 1e3 : NAN, 9); }

static void margin_cells(table *t, const lstub__row *row, const lstub_margin *margin)
{
    if (!row->judged) {
        empty_cells(t, 4);
        return;
    }
    number_cell(t, margin->f1 * 1e-9, 6);
    number_cell(t, margin->notch_over_nyquist, 6);
    number_cell(t, margin->added_loss_db, 6);
    text_cell(t, margin->pass ? "yes" : "no");
}

static void cut_cells(table *t, const lstub_board *board, const lstub_drill_cut *cut)
{
    if (!cut->drilled) {
        empty_cells(t, 7);
        return;
    }
    text_cell(t, lstub__report_layer(board, cut->must_not_cut));
    number_cell(t, cut->depth * 1e3, 9);
    number_cell(t, cut->residual * 1e3, 9);
    number_cell(t, cut->residual_most * 1e3, 9);
    number_cell(t, cut->limit * 1e3, 9);
    number_cell(t, cut->diameter * 1e3, 9);
    integer_cell(t, (long)cut->group + 1);
}

static int32_t plan_row(table *t, const lstub__report *report, size_t index, lstub_error *err)
{
    char reason[LSTUB_REASON_MAX] = "";
    lstub__row row;
    int32_t status = lstub__report_row(report, index, &row, err);
    if (status >= 0)
        status = lstub_plan_reason(report->plan, index, reason, sizeof reason, err);
    if (status < 0)
        return status;
    const lstub_decision *d = &row.decision;
    text_cell(t, row.hole->name);
    text_cell(t, row.hole->net);
    text_cell(t, row.hole->padstack);
    number_cell(t, row.hole->x * 1e3, 9);
    number_cell(t, row.hole->y * 1e3, 9);
    text_cell(t, row.signal);
    number_cell(t, row.symbol_rate * 1e-9, 9);
    number_cell(t, row.levels > 0 ? (double)row.levels : (double)NAN, 9);
    span_cells(t, report->board, &row.hole->via);
    stub_cell(t, d->stub_top);
    stub_cell(t, d->stub_bottom);
    margin_cells(t, &row, &d->before);
    text_cell(t, lstub_action_name(d->action));
    cut_cells(t, report->board, &d->bottom);
    cut_cells(t, report->board, &d->top);
    margin_cells(t, &row, &d->after);
    text_cell(t, lstub_status_name(d->status));
    text_cell(t, reason);
    end_row(t);
    return LSTUB_OK;
}

int32_t lstub_board_write_plan_csv(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err)
{
    table t = {NULL, 0};
    lstub__report report;
    size_t i;
    int32_t status = lstub__report_open(&report, board, plan, err);
    if (status == LSTUB_OK)
        status = lstub__out_open(path, &board->alloc, &t.out, err);
    if (status < 0)
        return status;
    lstub__out_text(t.out, plan_head);
    for (i = 0; i < board->hole_count && status == LSTUB_OK; i++)
        status = plan_row(&t, &report, i, err);
    return lstub__out_close(t.out, status, err);
}

/* ---- drill_table.csv ----------------------------------------------------------------------------- */

static int32_t drill_row(table *t, const lstub_board *board, const lstub_plan *plan, int32_t index, lstub_error *err)
{
    lstub_drill_group group;
    int32_t status;
    LSTUB_INIT(group);
    status = lstub_plan_group(plan, index, &group, err);
    if (status < 0)
        return status;
    integer_cell(t, (long)index + 1);
    text_cell(t, group.side == LSTUB_SIDE_TOP ? "top" : "bottom");
    number_cell(t, group.diameter * 1e3, 9);
    text_cell(t, lstub__report_layer(board, group.from_layer));
    text_cell(t, lstub__report_layer(board, group.must_not_cut));
    number_cell(t, group.depth * 1e3, 9);
    number_cell(t, group.tolerance * 1e3, 9);
    number_cell(t, group.residual_most * 1e3, 9);
    integer_cell(t, group.hits);
    end_row(t);
    return LSTUB_OK;
}

int32_t lstub_board_write_drill_csv(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err)
{
    table t = {NULL, 0};
    lstub__report report;
    int32_t i, groups, status = lstub__report_open(&report, board, plan, err);
    if (status == LSTUB_OK)
        status = lstub__out_open(path, &board->alloc, &t.out, err);
    if (status < 0)
        return status;
    lstub__out_text(t.out, "row,side,bit_mm,from_layer,must_not_cut_layer,target_depth_mm,tolerance_mm,residual_most_mm,hits\n");
    groups = lstub_plan_group_count(plan);
    for (i = 0; i < groups && status == LSTUB_OK; i++)
        status = drill_row(&t, board, plan, i, err);
    return lstub__out_close(t.out, status, err);
}
