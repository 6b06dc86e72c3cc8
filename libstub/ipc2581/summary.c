/* The summary a person reads: board, notices, signals, drill table, what is left failing, words of care. */
#include "ipc2581/report.h"

#include "base/base.h"
#include "ipc2581/arena.h"
#include "ipc2581/number.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define WIDTH        100 /* characters of a line */
#define LISTED       10  /* notices, failing vias */
#define NAME_WIDTH   24  /* of names, longer ones are cut */
#define SIGNAL_WIDTH 13  /* of a signal's, in the table   */

/* ---- a page of text ------------------------------------------------------------------------------ */

typedef struct page {
    char  *text;      /* null: only counted */
    size_t room, used;
} page;

static void put(page *p, const char *text, size_t count)
{
    if (p->used < p->room)
        memcpy(p->text + p->used, text, count < p->room - p->used ? count : p->room - p->used);
    p->used += count;
}

static void say(page *p, const char *text) { put(p, text, strlen(text)); }

static void spaces(page *p, int count)
{
    while (count-- > 0)
        put(p, " ", 1);
}

/* Bytes of the first `characters` of a text in UTF-8; *fits: how many characters these are. */
static size_t span_of(const char *text, int characters, int *fits)
{
    size_t i = 0;
    *fits = 0;
    while (text[i] != '\0' && *fits < characters) {
        i++;
        while (((unsigned char)text[i] & 0xC0) == 0x80)
            i++;
        ++*fits;
    }
    return i;
}

static int characters_of(const char *text)
{
    int fits;
    span_of(text, WIDTH, &fits);
    return fits;
}

/* A name as it is, but for control characters, which would break lines; cut with a ~ when it is too long. */
static void name(page *p, const char *text, int width)
{
    int fits;
    size_t i, bytes = span_of(text, width, &fits);
    int cut = text[bytes] != '\0';
    if (cut)
        bytes = span_of(text, width - 1, &fits);
    for (i = 0; i < bytes; i++)
        put(p, (unsigned char)text[i] < 0x20 || text[i] == 0x7F ? "?" : text + i, 1);
    if (cut)
        put(p, "~", 1);
}

static void left(page *p, const char *text, int width)
{
    int length = characters_of(text);
    name(p, text, width);
    spaces(p, width - (length < width ? length : width));
}

static void right(page *p, const char *text, int width)
{
    spaces(p, width - characters_of(text));
    say(p, text);
}

static void integer(page *p, int64_t value, int width)
{
    char text[LSTUB__NUMBER_MAX];
    snprintf(text, sizeof text, "%ld", (long)value);
    right(p, text, width);
}

/* "-" for what is not there */
static void number(page *p, double value, int decimals, int width)
{
    char text[LSTUB__NUMBER_MAX];
    lstub__fixed(text, value, decimals);
    right(p, text[0] != '\0' ? text : "-", width);
}

static void end_line(page *p) { put(p, "\n", 1); }

/* Text broken at blanks; the first line begins at column `at`, the others at `indent`. */
static void wrapped(page *p, const char *text, int at, int indent)
{
    int column = at, first = 1;
    while (*text != '\0') {
        size_t bytes = strcspn(text, " ");
        int fits;
        char word[WIDTH * 4 + 1];
        size_t part = span_of(text, WIDTH - indent, &fits);
        bytes = bytes < part ? bytes : part;
        memcpy(word, text, bytes);
        word[bytes] = '\0';
        fits = characters_of(word);
        if (!first && column + 1 + fits > WIDTH) {
            end_line(p);
            spaces(p, indent);
            column = indent;
        } else if (!first) {
            spaces(p, 1);
            column++;
        }
        name(p, word, WIDTH);
        column += fits;
        first = 0;
        text += bytes;
        text += strspn(text, " ");
    }
    end_line(p);
}

/* ---- board and notices --------------------------------------------------------------------------- */

static void count_of(page *p, int64_t count, const char *what)
{
    integer(p, count, 0);
    say(p, " ");
    say(p, what);
}

static void board_lines(page *p, const lstub_board *board)
{
    int32_t first = 0, last = 0, copper = lstub_stackup_copper_count(board->stackup);
    double bottom = 0.0;
    size_t i, vias = 0, refused = 0;
    lstub_stackup_copper(board->stackup, 0, &first, NULL);
    lstub_stackup_copper(board->stackup, copper - 1, &last, NULL);
    lstub_stackup_depth(board->stackup, last, NULL, &bottom, NULL);
    for (i = 0; i < board->hole_count; i++) {
        vias += board->holes[i].kind == LSTUB_HOLE_VIA;
        refused += board->holes[i].status < 0;
    }
    say(p, "Back-drill plan of board ");
    name(p, board->step, 70);
    say(p, "\n\nStackup   ");
    count_of(p, copper, "copper layers, ");
    name(p, lstub__report_layer(board, first), NAME_WIDTH);
    say(p, " to ");
    name(p, lstub__report_layer(board, last), NAME_WIDTH);
    say(p, ", ");
    number(p, bottom * 1e3, 3, 0);
    say(p, " mm (");
    number(p, bottom / 25.4e-6, 1, 0);
    say(p, " mil) over copper\nHoles     ");
    count_of(p, (int64_t)board->hole_count, "plated: ");
    count_of(p, (int64_t)vias, "vias, ");
    count_of(p, (int64_t)(board->hole_count - vias), "pins");
    if (refused > 0) {
        say(p, "; ");
        count_of(p, (int64_t)refused, "cannot be used as vias");
    }
    end_line(p);
}

static void totals_lines(page *p, const lstub_plan_summary *totals, int64_t one_layer)
{
    int64_t judged = totals->vias - totals->not_judged - totals->refused;
    say(p, "Judged    ");
    count_of(p, judged, "holes; ");
    count_of(p, totals->not_judged - one_layer, "carry no signal that matters");
    if (one_layer > 0) {
        say(p, ", ");
        count_of(p, one_layer, "connect on one layer only");
    }
    if (totals->refused > 0) {
        say(p, ", ");
        count_of(p, totals->refused, "are in error");
    }
    say(p, "\n          ");
    count_of(p, totals->keep, "keep, ");
    count_of(p, totals->drill_bottom, "drill bottom, ");
    count_of(p, totals->drill_top, "drill top, ");
    count_of(p, totals->drill_both, "drill both, ");
    count_of(p, totals->cannot, "cannot pass\n");
    if (totals->outside_range > 0) {
        say(p, "          ");
        count_of(p, totals->outside_range, "of them judged by the model outside its stated range\n");
    }
}

static void notice_line(page *p, const lstub_notice *notice)
{
    static const char *const words[] = {"note", "warning", "refused"};
    char line[LSTUB__NUMBER_MAX], head[64];
    snprintf(line, sizeof line, "%ld", (long)notice->line);
    snprintf(head, sizeof head, "  %-8s%s%-8s", words[notice->severity], notice->line >= 0 ? "line " : "     ",
             notice->line >= 0 ? line : "");
    say(p, head);
    int at = (int)strlen(head);
    if (notice->count > 1) {
        snprintf(head, sizeof head, "%ld times: ", (long)notice->count);
        say(p, head);
        at += (int)strlen(head);
    }
    wrapped(p, notice->message, at, 23);
}

static void notices_block(page *p, const lstub_board *board)
{
    int32_t severity;
    size_t i, listed = 0, count[3] = {0, 0, 0};
    for (i = 0; i < board->notice_count; i++)
        count[board->notices[i].severity]++;
    say(p, "Notices   ");
    if (board->notice_count == 0) {
        say(p, "none: nothing in the file was missing or contradictory\n");
        return;
    }
    count_of(p, (int64_t)count[LSTUB_NOTICE_REFUSED], "refused, ");
    count_of(p, (int64_t)count[LSTUB_NOTICE_WARNING], count[LSTUB_NOTICE_WARNING] == 1 ? "warning, " : "warnings, ");
    count_of(p, (int64_t)count[LSTUB_NOTICE_NOTE], count[LSTUB_NOTICE_NOTE] == 1 ? "note\n" : "notes\n");
    for (severity = LSTUB_NOTICE_REFUSED; severity >= LSTUB_NOTICE_NOTE; severity--)
        for (i = 0; i < board->notice_count && listed < LISTED; i++)
            if (board->notices[i].severity == severity) {
                notice_line(p, &board->notices[i]);
                listed++;
            }
    if (listed < board->notice_count) {
        say(p, "  and ");
        count_of(p, (int64_t)(board->notice_count - listed), "more\n");
    }
}

/* ---- signals ------------------------------------------------------------------------------------- */

typedef struct signal_total {
    const char *name;
    double      symbol_rate;
    int32_t     levels;
    int64_t     holes, keep, bottom, top, both, cannot;
    double      ratio[2], loss[2];   /* worst before and after */
} signal_total;

static signal_total *total_of(lstub__list *totals, const lstub__row *row, lstub_error *err)
{
    size_t i;
    signal_total *t;
    for (i = 0; i < totals->count; i++) {
        t = LSTUB__ITEM(*totals, signal_total, i);
        if (t->name == row->signal && t->symbol_rate == row->symbol_rate)
            return t;
    }
    t = lstub__list_add(totals, err);
    if (t != NULL) {
        t->name = row->signal;
        t->symbol_rate = row->symbol_rate;
        t->levels = row->levels;
        t->ratio[0] = t->ratio[1] = HUGE_VAL;
    }
    return t;
}

static void add_hole(signal_total *t, const lstub__row *row)
{
    const lstub_margin *margin[2] = {&row->decision.before, &row->decision.after};
    int32_t action = row->decision.action;
    int i;
    t->holes++;
    t->keep += action == LSTUB_ACTION_KEEP;
    t->bottom += action == LSTUB_ACTION_DRILL_BOTTOM;
    t->top += action == LSTUB_ACTION_DRILL_TOP;
    t->both += action == LSTUB_ACTION_DRILL_BOTH;
    t->cannot += action == LSTUB_ACTION_CANNOT;
    for (i = 0; i < 2; i++) {
        t->ratio[i] = fmin(t->ratio[i], margin[i]->notch_over_nyquist);
        t->loss[i] = fmax(t->loss[i], margin[i]->added_loss_db);
    }
}

static void signals_block(page *p, const lstub__list *totals)
{
    int width = 6;
    size_t i;
    say(p, "\nSignals\n");
    if (totals->count == 0) {
        say(p, "  none judged: no net of this board carries a signal by the rules\n");
        return;
    }
    for (i = 0; i < totals->count; i++) {
        int length = characters_of(LSTUB__ITEM(*totals, signal_total, i)->name);
        width = length > width ? (length < SIGNAL_WIDTH ? length : SIGNAL_WIDTH) : width;
    }
    spaces(p, width + 2);
    say(p, "                                - - - drill - - -         worst before   worst after\n  ");
    left(p, "signal", width);
    say(p, "       GBd levels  holes   keep bottom  top both cannot   notch loss dB  notch loss dB\n");
    for (i = 0; i < totals->count; i++) {
        const signal_total *t = LSTUB__ITEM(*totals, signal_total, i);
        char rate[LSTUB__NUMBER_MAX];
        int k;
        say(p, "  ");
        left(p, t->name[0] != '\0' ? t->name : "?", width);
        right(p, lstub__significant(rate, t->symbol_rate * 1e-9, 7), 10);
        number(p, t->levels > 0 ? (double)t->levels : (double)NAN, 0, 7);
        integer(p, t->holes, 7);
        integer(p, t->keep, 7);
        integer(p, t->bottom, 7);
        integer(p, t->top, 5);
        integer(p, t->both, 5);
        integer(p, t->cannot, 7);
        for (k = 0; k < 2; k++) {
            number(p, t->ratio[k], 2, 7);
            say(p, t->ratio[k] < HUGE_VAL ? "x" : " ");
            number(p, t->loss[k], 2, 7);
        }
        end_line(p);
    }
    say(p, "  notch: the first over the Nyquist frequency, least of all holes; loss: added at Nyquist, most\n");
}

/* ---- drill table --------------------------------------------------------------------------------- */

static int32_t drills_block(page *p, const lstub_board *board, const lstub_plan *plan, const lstub_plan_summary *totals,
                            lstub_error *err)
{
    int32_t i, count = lstub_plan_group_count(plan), status = LSTUB_OK;
    say(p, "\nDrill table\n");
    if (count == 0) {
        say(p, "  nothing to drill\n");
        return LSTUB_OK;
    }
    say(p, "  row side      bit from             must not cut       target   depth    +/-  stub left   hits\n");
    say(p, "                 mm                                         mm     mil     mm  at most mm\n");
    for (i = 0; i < count && status == LSTUB_OK; i++) {
        lstub_drill_group group;
        LSTUB_INIT(group);
        status = lstub_plan_group(plan, i, &group, err);
        if (status < 0)
            break;
        integer(p, i + 1, 5);
        say(p, group.side == LSTUB_SIDE_TOP ? " top   " : " bottom");
        number(p, group.diameter * 1e3, 3, 7);
        say(p, " ");
        left(p, lstub__report_layer(board, group.from_layer), 16);
        say(p, " ");
        left(p, lstub__report_layer(board, group.must_not_cut), 16);
        number(p, group.depth * 1e3, 3, 9);
        number(p, group.depth / 25.4e-6, 1, 8);
        number(p, group.tolerance * 1e3, 3, 7);
        number(p, group.residual_most * 1e3, 3, 11);
        integer(p, group.hits, 7);
        end_line(p);
    }
    say(p, "  depth: from the outer face of that side's copper; stub left: with all tolerances\n");
    say(p, "  Different depths: ");
    count_of(p, totals->depths_bottom, "from the bottom, ");
    count_of(p, totals->depths_top, "from the top: the fewest that serve the holes drilled.\n");
    return status;
}

/* ---- what is left over --------------------------------------------------------------------------- */

typedef struct failure {         /* holes that fail alike */
    size_t  index;               /* the first of them */
    int64_t count;
    double  factor;              /* how many times over its limit */
    lstub_decision decision;
    const char *signal;
} failure;

typedef struct worst_list {      /* the worst first */
    failure item[LISTED];
    size_t  count;
    int64_t failing, in_error;
} worst_list;

/* How many times the worse of the two criteria is exceeded. */
static double excess(const lstub_margin *m)
{
    double notch = isnan(m->notch_margin) ? 0.0 : (m->f1 - m->notch_margin) / m->f1;
    double loss = isnan(m->loss_margin_db) ? 0.0 : m->added_loss_db / (m->added_loss_db + m->loss_margin_db);
    return fmax(notch, loss);
}

static int alike(const failure *a, const lstub__row *row)
{
    const lstub_decision *x = &a->decision, *y = &row->decision;
    if (row->decision.action == LSTUB_ACTION_REFUSED)   /* numbers do not count */
        return x->action == y->action && a->signal == row->signal && x->status == y->status;
    return a->signal == row->signal && x->action == y->action && x->reason == y->reason && x->reason_side == y->reason_side && x->reason_layer == y->reason_layer
           && x->before.nyquist == y->before.nyquist && x->after.f1 == y->after.f1 && x->after.added_loss_db == y->after.added_loss_db
           && (x->reason_value == y->reason_value || (isnan(x->reason_value) && isnan(y->reason_value)));
}

/* A kind of failure that has once fallen off the end stays off: counts of those listed are complete. */
static void add_failing(worst_list *list, size_t index, const lstub__row *row)
{
    int refused = row->decision.action == LSTUB_ACTION_REFUSED;
    failure one = {index, 1, refused ? HUGE_VAL : excess(&row->decision.after), row->decision, row->signal};
    size_t i;
    list->failing += !refused;
    list->in_error += refused;
    for (i = 0; i < list->count; i++)
        if (alike(&list->item[i], row)) {
            list->item[i].count++;
            return;
        }
    for (i = list->count; i > 0 && list->item[i - 1].factor < one.factor; i--)
        if (i < LISTED)
            list->item[i] = list->item[i - 1];
    if (i < LISTED)
        list->item[i] = one;
    list->count += list->count < LISTED;
}

static int32_t failing_lines(page *p, const lstub_board *board, const lstub_plan *plan, const failure *f, lstub_error *err)
{
    const board_hole *hole = &board->holes[f->index];
    char reason[LSTUB_REASON_MAX] = "";
    int32_t status = lstub_plan_reason(plan, f->index, reason, sizeof reason, err);
    if (status < 0)
        return status;
    say(p, "  ");
    name(p, hole->name[0] != '\0' ? hole->name : "hole without a name", NAME_WIDTH);
    say(p, ", net ");
    name(p, hole->net, NAME_WIDTH);
    say(p, ", ");
    name(p, f->signal[0] != '\0' ? f->signal : "?", NAME_WIDTH);
    if (f->count > 1) {
        say(p, ", and ");
        count_of(p, f->count - 1, "alike");
    }
    say(p, "\n      ");
    wrapped(p, reason, 6, 6);
    return LSTUB_OK;
}

static int32_t failing_block(page *p, const lstub_board *board, const lstub_plan *plan, const worst_list *list, lstub_error *err)
{
    size_t i;
    int64_t left_over = list->failing + list->in_error;
    int32_t status = LSTUB_OK;
    say(p, "\nLeft over\n");
    if (left_over == 0) {
        say(p, "  nothing: every hole judged passes after the plan\n");
        return LSTUB_OK;
    }
    say(p, "  ");
    count_of(p, list->failing, "still fail");
    if (list->in_error > 0) {
        say(p, ", ");
        count_of(p, list->in_error, "are in error");
    }
    say(p, "; the worst first:\n");
    for (i = 0; i < list->count && status == LSTUB_OK; i++) {
        status = failing_lines(p, board, plan, &list->item[i], err);
        left_over -= list->item[i].count;
    }
    if (left_over > 0) {
        say(p, "  and ");
        count_of(p, left_over, "more: see plan.csv\n");
    }
    return status;
}

/* ---- all of it ----------------------------------------------------------------------------------- */

typedef struct findings {
    lstub__list signals;         /* of signal_total */
    worst_list  worst;
    int64_t     one_layer;
} findings;

static int32_t survey(const lstub__report *report, findings *f, lstub_error *err)
{
    size_t i;
    for (i = 0; i < report->board->hole_count; i++) {
        lstub__row row;
        int32_t status = lstub__report_row(report, i, &row, err);
        if (status < 0)
            return status;
        f->one_layer += row.decision.reason == LSTUB_REASON_ONE_LAYER;
        if (row.judged) {
            signal_total *t = total_of(&f->signals, &row, err);
            if (t == NULL)
                return LSTUB_E_MEMORY;
            add_hole(t, &row);
        }
        if (row.decision.action == LSTUB_ACTION_REFUSED || (row.judged && !row.decision.after.pass))
            add_failing(&f->worst, i, &row);
    }
    return LSTUB_OK;
}

static int32_t write_page(page *p, const lstub__report *report, lstub_error *err)
{
    const lstub_board *board = report->board;
    const lstub_plan *plan = report->plan;
    lstub_plan_summary totals;
    findings f;
    int32_t status;
    memset(&f, 0, sizeof f);
    LSTUB_INIT(totals);
    lstub__list_init(&f.signals, &board->alloc, sizeof(signal_total));
    status = lstub_plan_totals(plan, &totals, err);
    if (status == LSTUB_OK)
        status = survey(report, &f, err);
    if (status == LSTUB_OK) {
        board_lines(p, board);
        totals_lines(p, &totals, f.one_layer);
        notices_block(p, board);
        signals_block(p, &f.signals);
        status = drills_block(p, board, plan, &totals, err);
    }
    if (status == LSTUB_OK)
        status = failing_block(p, board, plan, &f.worst, err);
    lstub__list_clear(&f.signals);
    say(p, "\nThese are estimates from a model. Confirm drill depths, tolerances and clearances with the\n"
           "fabricator; verify critical links by measurement or full-wave simulation; safety-related equipment\n"
           "follows its own codes and licensed practice.\n");
    return status;
}

int32_t lstub_board_summary(const lstub_board *board, const lstub_plan *plan, char *text, size_t bytes, size_t *needed,
                            lstub_error *err)
{
    page p = {text, 0, 0};
    lstub__report report;
    int32_t status = lstub__report_open(&report, board, plan, err);
    if (status < 0)
        return status;
    if (text == NULL && needed == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "needed", -1, "needed = null: must not be null where text is");
    p.room = text == NULL ? 0 : bytes;
    status = write_page(&p, &report, err);
    if (status < 0)
        return status;
    if (needed != NULL)
        *needed = p.used + 1;
    if (text == NULL)
        return LSTUB_OK;
    if (p.used >= bytes) {
        size_t end = bytes > 0 ? bytes - 1 : 0;
        while (end > 0 && ((unsigned char)text[end] & 0xC0) == 0x80)   /* not within a character */
            end--;
        if (bytes > 0)
            text[end] = '\0';
        return lstub__fail(err, LSTUB_W_CAPACITY, "bytes", -1, "bytes = %lu: the summary needs %lu", (unsigned long)bytes,
                           (unsigned long)p.used + 1);
    }
    text[p.used] = '\0';
    return LSTUB_OK;
}
