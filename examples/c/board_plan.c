/*
** From a board file to a back-drill plan:   board_plan BOARD.xml[.gz] RULES.txt OUTDIR
**
** Prints a summary; writes plan.csv, drill_table.csv and the board with Backdrill specifications into OUTDIR.
*/
#include <libstub_ipc2581.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void must(int32_t status, const lstub_error *err)
{
    if (status < 0) {
        fprintf(stderr, "board_plan: %s (%s)\n", err->message, lstub_status_name(status));
        exit(1);
    }
}

static int32_t show_progress(void *user, double fraction)
{
    int *tenths = user;
    for (; *tenths < (int)(10.0 * fraction); fflush(stderr))
        fprintf(stderr, " %d%%", 10 * ++*tenths);
    return 0;
}

/* OUTDIR/prefix + name */
static char *path_in(const char *folder, const char *prefix, const char *name)
{
    const size_t bytes = strlen(folder) + strlen(prefix) + strlen(name) + 2;
    char *path = malloc(bytes);
    if (path == NULL) {
        fprintf(stderr, "board_plan: out of memory\n");
        exit(1);
    }
    snprintf(path, bytes, "%s/%s%s", folder, prefix, name);
    return path;
}

int main(int argc, char **argv)
{
    lstub_error err;
    lstub_rules *rules = NULL;
    lstub_board *board = NULL;
    lstub_plan *plan = NULL;
    lstub_board_options options;
    int tenths = 0;
    size_t needed = 0;
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    options.progress = show_progress;
    options.progress_user = &tenths;
    if (argc != 4 || argv[3][0] == '\0') {
        fprintf(stderr, "usage: board_plan BOARD.xml[.gz] RULES.txt OUTDIR\n");
        return 1;
    }
    const char *slash = strrchr(argv[1], '/');
    char *plan_csv = path_in(argv[3], "", "plan.csv"), *drill_csv = path_in(argv[3], "", "drill_table.csv");
    char *copy = path_in(argv[3], "backdrilled_", slash ? slash + 1 : argv[1]);

    fprintf(stderr, "rules %s\n", argv[2]);
    must(lstub_rules_load(argv[2], NULL, &rules, &err), &err);
    fprintf(stderr, "reading %s:", argv[1]);
    const int32_t status = lstub_board_load(argv[1], rules, &options, NULL, &board, &err);
    fprintf(stderr, "\n");
    must(status, &err);
    fprintf(stderr, "planning %zu holes\n", lstub_board_hole_count(board));
    must(lstub_board_plan(board, rules, NULL, NULL, NULL, &plan, &err), &err);

    must(lstub_board_summary(board, plan, NULL, 0, &needed, &err), &err);
    char *text = malloc(needed);
    if (text == NULL) {
        fprintf(stderr, "board_plan: out of memory\n");
        return 1;
    }
    must(lstub_board_summary(board, plan, text, needed, &needed, &err), &err);
    printf("%s", text);
    fflush(stdout);      /* the summary before what goes to stderr next */

    fprintf(stderr, "writing %s, %s, %s\n", plan_csv, drill_csv, copy);
    must(lstub_board_write_plan_csv(board, plan, plan_csv, &err), &err);
    must(lstub_board_write_drill_csv(board, plan, drill_csv, &err), &err);
    must(lstub_board_write(board, plan, copy, &err), &err);
    printf("\nrules: %s\nwritten: %s\n         %s\n         %s\n", argv[2], plan_csv, drill_csv, copy);
    free(text);
    free(plan_csv);
    free(drill_csv);
    free(copy);
    lstub_plan_destroy(plan);
    lstub_board_destroy(board);
    lstub_rules_destroy(rules);
    if (fflush(stdout) != 0) {
        fprintf(stderr, "board_plan: cannot write the summary\n");
        return 1;
    }
    return 0;
}
