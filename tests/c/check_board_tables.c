/* Plan table, drill table and summary of a board. */
#define _POSIX_C_SOURCE 200809L
#include "libstub_ipc2581.h"
#include "check_board_output.h"

/* ---- tables -------------------------------------------------------------------------------------- */

/* Cuts the next cell off, quotes taken away; *at is null after the last of the line. */
static void next_cell(char **at, char *cell, size_t bytes)
{
    char *p = *at;
    size_t n = 0;
    int quoted = *p == '"';
    for (p += quoted; *p != '\0'; p++) {
        if (quoted && *p == '"' && *++p != '"')
            quoted = 0;
        if (!quoted && (*p == ',' || *p == '\n'))
            break;
        ck_assert_uint_lt(n + 1, bytes);
        cell[n++] = *p;
    }
    ck_assert(*p != '\0');
    cell[n] = '\0';
    *at = *p == ',' ? p + 1 : NULL;
    if (*at == NULL)
        memmove(cell + n + 1, p + 1, 0);
}

#define COLUMNS_MAX 64

typedef struct csv {
    char  cell[COLUMNS_MAX][400];
    char  head[COLUMNS_MAX][400];
    int   columns;
    char *text, *line;
} csv;

static int read_row(csv *t, char (*row)[400])
{
    int count = 0;
    char *at = t->line;
    if (*at == '\0')
        return 0;
    while (at != NULL) {
        char *was = at;
        ck_assert_int_lt(count, COLUMNS_MAX);
        next_cell(&at, row[count], sizeof row[count]);
        if (at == NULL) {   /* the line ends behind this cell */
            int quoted = 0;
            for (; *was != '\n' || quoted; was++)
                quoted ^= *was == '"';
            t->line = was + 1;
        }
        count++;
    }
    return count;
}

static csv open_csv(const char *path)
{
    csv t;
    t.text = t.line = content(path);
    t.columns = read_row(&t, t.head);
    return t;
}

static int next_row(csv *t)
{
    int count = read_row(t, t->cell);
    ck_assert_msg(count == 0 || count == t->columns, "%d cells, %d columns", count, t->columns);
    return count > 0;
}

static const char *cell(const csv *t, const char *name)
{
    for (int i = 0; i < t->columns; i++)
        if (strcmp(t->head[i], name) == 0)
            return t->cell[i];
    ck_abort_msg("no column '%s'", name);
    return "";
}

static void assert_cell(const csv *t, const char *name, double want)
{
    const char *text = cell(t, name);
    if (!isfinite(want))
        ck_assert_msg(text[0] == '\0', "%s = %s", name, text);
    else
        assert_close(strtod(text, NULL), want, 2e-5, 1e-12, "the plan, to the digits printed");
}

START_TEST(plan_table)
{
    static const char *const nets[] = {"FAST_A", "+3V3", "FAST_B", "FAST_B", "FAST_B", "FAST_B", "FAST_C", "=FAST(D1)", "FAST,\"E\"", "FAST_F"};
    enter_folder("plan_csv");
    job j = plan_small(&spellings[1], NULL);
    assert_ok(lstub_board_write_plan_csv(j.board, j.plan, "plan.csv", &err), err);
    csv t = open_csv("plan.csv");
    ck_assert_ptr_nonnull(strstr(t.text, "\"=FAST(D1)\""));
    ck_assert_ptr_nonnull(strstr(t.text, "\"+3V3\""));
    ck_assert_ptr_nonnull(strstr(t.text, "\"FAST,\"\"E\"\"\""));
    for (size_t i = 0; i < COUNT(nets); i++) {
        lstub_decision d = decision_of(&j, i);
        char name[8], reason[LSTUB_REASON_MAX];
        ck_assert(next_row(&t));
        snprintf(name, sizeof name, "H%d", (int)i);
        ck_assert_str_eq(cell(&t, "hole"), name);
        ck_assert_str_eq(cell(&t, "net"), nets[i]);
        assert_cell(&t, "x_mm", 2.0 * (double)i);
        assert_cell(&t, "y_mm", 5.0);
        ck_assert_str_eq(cell(&t, "signal"), i == 1 ? "" : "FAST");
        assert_cell(&t, "symbol_rate_GBd", i == 1 ? NAN : 56.0);
        ck_assert_str_eq(cell(&t, "start_layer"), "L1");
        ck_assert_str_eq(cell(&t, "end_layer"), "L6");
        ck_assert_str_eq(cell(&t, "action"), lstub_action_name(d.action));
        assert_cell(&t, "stub_bottom_mm", d.stub_bottom > 0.0 ? d.stub_bottom * 1e3 : NAN);
        assert_cell(&t, "before_first_notch_GHz", i == 1 ? NAN : d.before.f1 * 1e-9);
        assert_cell(&t, "after_added_loss_dB", i == 1 ? NAN : d.after.added_loss_db);
        ck_assert_str_eq(cell(&t, "after_pass"), i == 1 ? "" : d.after.pass ? "yes" : "no");
        assert_cell(&t, "bottom_depth_mm", d.bottom.drilled ? d.bottom.depth * 1e3 : NAN);
        assert_cell(&t, "bottom_drill_row", d.bottom.drilled ? d.bottom.group + 1.0 : NAN);
        assert_cell(&t, "top_residual_most_mm", d.top.drilled ? d.top.residual_most * 1e3 : NAN);
        ck_assert_str_eq(cell(&t, "top_must_not_cut"), !d.top.drilled ? "" : i == 8 ? "L4" : "L3 <&\">");
        assert_ok(lstub_plan_reason(j.plan, i, reason, sizeof reason, &err), err);
        ck_assert_str_eq(cell(&t, "reason"), reason);
        for (int k = 0; k + 1 < t.columns; k++)
            ck_assert_msg(strcmp(t.cell[k], "nan") != 0 && strstr(t.cell[k], "inf") == NULL, "%s: %s", t.head[k], t.cell[k]);
    }
    ck_assert(!next_row(&t));
    free(t.text);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(drill_table)
{
    int64_t hits = 0;
    enter_folder("drill_csv");
    job j = plan_small(&spellings[0], NULL);
    assert_ok(lstub_board_write_drill_csv(j.board, j.plan, "drill.csv", &err), err);
    csv t = open_csv("drill.csv");
    ck_assert_int_gt(lstub_plan_group_count(j.plan), 1);
    for (int32_t i = 0; i < lstub_plan_group_count(j.plan); i++) {
        lstub_drill_group g;
        LSTUB_INIT(g);
        assert_ok(lstub_plan_group(j.plan, i, &g, &err), err);
        ck_assert(next_row(&t));
        assert_cell(&t, "row", i + 1.0);
        ck_assert_str_eq(cell(&t, "side"), g.side == LSTUB_SIDE_TOP ? "top" : "bottom");
        ck_assert_str_eq(cell(&t, "from_layer"), g.side == LSTUB_SIDE_TOP ? "L1" : "L6");
        assert_cell(&t, "bit_mm", g.diameter * 1e3);
        assert_cell(&t, "target_depth_mm", g.depth * 1e3);
        assert_cell(&t, "tolerance_mm", 0.03);
        assert_cell(&t, "residual_most_mm", g.residual_most * 1e3);
        assert_cell(&t, "hits", g.hits);
        hits += g.hits;
    }
    ck_assert(!next_row(&t));
    ck_assert_int_eq(hits, planned_drills(&j));
    free(t.text);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(same_in_every_locale)
{
    static const char *const names[] = {"o.xml", "plan.csv", "drill.csv"};
    const char *comma = getenv("LSTUB_COMMA_LOCALE");
    size_t needed = 0;
    char *text[2][4];
    if (comma == NULL || setlocale(LC_ALL, comma) == NULL) {
        ck_assert_msg(comma == NULL, "locale '%s' cannot be set", comma);
        printf("skipped: LSTUB_COMMA_LOCALE does not name a locale with a decimal comma\n");
        return;
    }
    setlocale(LC_ALL, "C");                    /* the board is spelled with decimal points */
    enter_folder("locale");
    job j = plan_small(&spellings[1], NULL);
    for (int pass = 0; pass < 2; pass++) {
        ck_assert_ptr_nonnull(setlocale(LC_ALL, pass == 0 ? "C" : comma));
        for (int which = 0; which < 3; which++) {
            assert_ok(write_all_three(&j, names[which], which), err);
            text[pass][which] = content(names[which]);
        }
        assert_ok(lstub_board_summary(j.board, j.plan, NULL, 0, &needed, &err), err);
        text[pass][3] = malloc(needed);
        assert_ok(lstub_board_summary(j.board, j.plan, text[pass][3], needed, &needed, &err), err);
    }
    for (int i = 0; i < 4; i++) {
        ck_assert_str_eq(text[0][i], text[1][i]);
        free(text[0][i]);
        free(text[1][i]);
    }
    setlocale(LC_ALL, "C");
    release(&j);
    leave_folder();
}
END_TEST

/* ---- summary ------------------------------------------------------------------------------------- */

static void assert_page(const char *text)
{
    for (size_t n; *text != '\0'; text += n + 1) {
        n = strcspn(text, "\n");
        ck_assert_msg(n <= 100, "%d characters: %.*s", (int)n, (int)n, text);
        ck_assert(text[n] == '\n');
        for (size_t i = 0; i < n; i++)
            ck_assert_msg(text[i] >= ' ' && text[i] <= '~', "byte %d", text[i]);
    }
}

START_TEST(summary)
{
    static const char *const wanted[] = {"SMALL", "6 copper layers", "2.180 mm", "10 plated", "FAST", "Drill table", "bottom", "fewest",
                                         "Confirm drill depths, tolerances and clearances", "full-wave"};
    char text[20000], again[20000];
    size_t needed = 0, other = 0;
    enter_folder("summary");
    job j = plan_small(&spellings[0], NULL);
    assert_ok(lstub_board_summary(j.board, j.plan, NULL, 0, &needed, &err), err);
    ck_assert_uint_lt(needed, sizeof text);
    assert_ok(lstub_board_summary(j.board, j.plan, text, needed, &other, &err), err);
    ck_assert_uint_eq(needed, other);
    ck_assert_uint_eq(strlen(text) + 1, needed);
    assert_page(text);
    for (size_t i = 0; i < COUNT(wanted); i++)
        ck_assert_msg(strstr(text, wanted[i]) != NULL, "no '%s' in\n%s", wanted[i], text);
    for (size_t room = 0; room < needed; room += 97) {
        memset(again, 'x', sizeof again);
        assert_refused(lstub_board_summary(j.board, j.plan, again, room, &other, &err), LSTUB_W_CAPACITY, err, "bytes");
        ck_assert_uint_eq(other, needed);
        ck_assert(again[room] == 'x' && (room == 0 || strlen(again) == room - 1));
        ck_assert(room == 0 || strncmp(again, text, room - 1) == 0);
    }
    release(&j);
    leave_folder();
}
END_TEST

/* Every hole fails, and none can be drilled: alike ones are told once, with how many there are. */
START_TEST(summary_of_failures)
{
    char rules[1024], text[20000];
    enter_folder("failures");
    snprintf(rules, sizeof rules, "%sfab residual_min 1 mm\n", rules_text);
    char *board = spell(&spellings[0], NULL, NULL);
    save("b.xml", board);
    free(board);
    job j = plan_file("b.xml", rules, NULL);
    ck_assert_int_eq(planned_drills(&j), 0);
    assert_ok(lstub_board_summary(j.board, j.plan, text, sizeof text, NULL, &err), err);
    assert_page(text);
    ck_assert_ptr_nonnull(strstr(text, "nothing to drill"));
    ck_assert_ptr_nonnull(strstr(text, "and 3 alike"));   /* H0, H2, H4, H7 */
    assert_ok(lstub_board_write(j.board, j.plan, "o.xml", &err), err);
    release(&j);
    leave_folder();
}
END_TEST

/* A plan made with other rules than the board was read with: numbers from the plan, no name that may be wrong. */
START_TEST(plan_by_other_rules)
{
    static const char other_text[] = "signal SLOWER symbol_rate 50 GBd added_loss 0.2 dB\nnet FAST_A SLOWER\nfab depth_tolerance 1 um\n";
    lstub_rules *rules = NULL;
    lstub_plan *plan = NULL;
    enter_folder("other_rules");
    job j = plan_small(&spellings[0], NULL);
    assert_ok(lstub_rules_parse(other_text, strlen(other_text), NULL, &rules, &err), err);
    assert_ok(lstub_board_plan(j.board, rules, NULL, LOADED, NULL, &plan, &err), err);
    assert_ok(lstub_board_write_plan_csv(j.board, plan, "plan.csv", &err), err);
    csv t = open_csv("plan.csv");
    ck_assert(next_row(&t));
    ck_assert_str_eq(cell(&t, "signal"), "");
    assert_cell(&t, "symbol_rate_GBd", 50.0);
    ck_assert(next_row(&t) && next_row(&t));
    ck_assert_str_eq(cell(&t, "net"), "FAST_B");
    ck_assert_str_eq(cell(&t, "symbol_rate_GBd"), "");
    ck_assert_str_eq(cell(&t, "signal"), "");
    free(t.text);
    lstub_plan_destroy(plan);
    lstub_rules_destroy(rules);
    release(&j);
    leave_folder();
}
END_TEST

/* ---- real boards --------------------------------------------------------------------------------- */

static const char shared_rules[] =
    "signal FAST symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2 added_loss 0.5 dB\n"
    "net *GND* none\nnet VSS* none\nnet +* none\nnet ?* FAST\n"
    "pair _P _N separate\nreturns VSS within 1.5 mm\nreturns GND within 1.5 mm\n"
    "default dk 4\ndefault loss_tangent 0.02\ndefault in_plane_ratio 1.1\ndefault antipad 0.8 mm\n"
    "fab depth_tolerance 0.05 mm\nfab cut_clearance 0.05 mm\nfab residual_target 0.15 mm\n";

START_TEST(shared_board)
{
    static const char *const names[] = {"testcase3", "testcase9", "testcase10"};
    const char *shared = getenv("LSTUB_SHARED");
    char path[600], text[60000];
    struct stat there;
    snprintf(path, sizeof path, "%s/boards/%s.xml.gz", shared != NULL ? shared : "", names[_i]);
    if (shared == NULL || stat(path, &there) != 0) {
        printf("skipped: LSTUB_SHARED does not lead to boards/%s.xml.gz\n", names[_i]);
        return;
    }
    enter_folder(names[_i]);
    job j = plan_file(path, shared_rules, NULL);
    ck_assert_int_gt(planned_drills(&j), 0);
    assert_ok(lstub_board_write(j.board, j.plan, "o.xml.gz", &err), err);
    ck_assert_int_eq(assert_read_back(&j, "o.xml.gz"), planned_drills(&j));
    assert_ok(lstub_board_write_plan_csv(j.board, j.plan, "plan.csv", &err), err);
    size_t rows = 0;
    csv t = open_csv("plan.csv");
    while (next_row(&t))
        rows++;
    ck_assert_uint_eq(rows, lstub_board_hole_count(j.board));
    free(t.text);
    assert_ok(lstub_board_summary(j.board, j.plan, text, sizeof text, NULL, &err), err);
    assert_page(text);
    release(&j);
    leave_folder();
}
END_TEST
int main(void)
{
    Suite *suite = suite_create("board_tables");
    TCase *tests = tcase_create("board_tables");
    tcase_set_timeout(tests, 120);
    tcase_add_test(tests, plan_table);
    tcase_add_test(tests, drill_table);
    tcase_add_test(tests, summary);
    tcase_add_test(tests, summary_of_failures);
    tcase_add_test(tests, plan_by_other_rules);
    tcase_add_loop_test(tests, shared_board, 0, 3);
    suite_add_tcase(suite, tests);
    tests = tcase_create("locale");
    tcase_add_test(tests, same_in_every_locale);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
