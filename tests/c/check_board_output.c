/* The board file that a plan writes: what it holds, and what stops it. */
#define _POSIX_C_SOURCE 200809L
#include "libstub_ipc2581.h"
#include "check_board_output.h"

/* ---- the board file ------------------------------------------------------------------------------ */

START_TEST(written_board_reads_back)
{
    const spelling *s = &spellings[_i];
    enter_folder(s->name);
    job j = plan_small(s, NULL);
    ck_assert_uint_eq(lstub_board_hole_count(j.board), COUNT(small_holes));
    ck_assert_int_eq(decision_of(&j, 0).action, LSTUB_ACTION_DRILL_BOTTOM);
    ck_assert_int_eq(decision_of(&j, 1).action, LSTUB_ACTION_NOT_JUDGED);
    ck_assert_int_eq(decision_of(&j, 3).action, LSTUB_ACTION_KEEP);
    ck_assert_int_eq(decision_of(&j, 5).action, LSTUB_ACTION_DRILL_BOTH);
    ck_assert_int_eq(decision_of(&j, 8).action, LSTUB_ACTION_DRILL_TOP);
    assert_ok(lstub_board_write(j.board, j.plan, "written.xml", &err), err);
    ck_assert_int_eq(assert_read_back(&j, "written.xml"), planned_drills(&j));
    assert_ok(lstub_board_write(j.board, j.plan, "written.xml.gz", &err), err);
    assert_read_back(&j, "written.xml.gz");
    char *plain = content("written.xml"), *packed = content("written.xml.gz");
    ck_assert_str_eq(plain, packed);
    free(plain);
    free(packed);
    assert_ok(lstub_board_write(j.board, j.plan, s->name, &err), err);   /* in place of its source */
    assert_read_back(&j, s->name);
    release(&j);
    leave_folder();
}
END_TEST

static size_t count_of(const char *text, const char *word)
{
    size_t count = 0;
    for (; (text = strstr(text, word)) != NULL; text++)
        count++;
    return count;
}

/* Takes out what was put in, by lines: Specs and SpecRefs called BACKDRILL_. */
static void without_backdrills(char *text)
{
    char *to = text, *line = text;
    int inside = 0;
    while (*line != '\0') {
        size_t n = strcspn(line, "\n") + 1;
        char *end = line + n, saved = *end;
        *end = '\0';
        inside |= strstr(line, "<Spec name=\"BACKDRILL_") != NULL;
        if (!inside && strstr(line, "<SpecRef id=\"BACKDRILL_") == NULL) {
            memmove(to, line, n);
            to += n;
        }
        if (strstr(line, "</Spec>") != NULL)
            inside = 0;
        *end = saved;
        line = end;
    }
    *to = '\0';
}

START_TEST(everything_else_is_as_it_was)
{
    enter_folder("verbatim");
    job j = plan_small(&spellings[0], NULL);
    char *source = content(spellings[0].name), *text, *head, *tail;
    assert_ok(lstub_board_write(j.board, j.plan, "written.xml", &err), err);
    text = content("written.xml");
    /* The only Set that is split is that of FAST_B: H2 | H3 | H4 | H5. */
    ck_assert_uint_eq(count_of(text, "<Set net=\"FAST_B\" geometry=\"V25\">"), 4);
    ck_assert_uint_eq(count_of(text, "<ColorRef id=\"C\"/>"), count_of(source, "<ColorRef id=\"C\"/>") + 3);
    ck_assert_uint_eq(count_of(text, "<Hole "), count_of(source, "<Hole "));
    ck_assert_uint_eq(count_of(text, "<Set "), count_of(source, "<Set ") + 3);
    without_backdrills(text);
    head = strstr(text, "name=\"H2\"");
    *head = '\0';
    tail = strstr(head + 1, "name=\"H6\"");
    ck_assert_msg(strncmp(source, text, strlen(text)) == 0, "before the split Set:\n%s", text);
    ck_assert_str_eq(strstr(source, "name=\"H6\""), tail);
    free(source);
    free(text);
    release(&j);
    leave_folder();
}
END_TEST

/* Holes without an element of their own get bare holes on drill layers, which say the same. */
START_TEST(holes_of_pad_stacks)
{
    enter_folder("pads");
    for (int i = 0; i < 3; i++) {
        char *source = spell(&spellings[i], NULL, with_pads), *text;
        ck_assert_uint_eq(count_of(source, "Hole "), 0);
        save("pads.xml", source);
        free(source);
        job j = plan_file("pads.xml", rules_text, NULL);
        ck_assert_uint_eq(lstub_board_hole_count(j.board), COUNT(small_holes));
        ck_assert_int_eq(decision_of(&j, 5).action, LSTUB_ACTION_DRILL_BOTH);
        assert_ok(lstub_board_write(j.board, j.plan, "written.xml", &err), err);
        ck_assert_int_eq(assert_read_back(&j, "written.xml"), planned_drills(&j));
        text = content("written.xml");
        ck_assert_int_eq((int64_t)count_of(text, "Hole name=\"BD"), planned_drills(&j));
        ck_assert_uint_eq(count_of(text, "Layer name=\"BACKDRILL_"), (size_t)lstub_plan_group_count(j.plan));
        free(text);
        release(&j);
    }
    leave_folder();
}
END_TEST

START_TEST(nothing_to_drill_is_a_copy)
{
    enter_folder("copy");
    char *text = spell(&spellings[1], "CadHeader units", "    <~CadHeader units=\"#\"/><!-- ");
    save("b.xml", text);
    free(text);
    text = spell(&spellings[1], NULL, NULL);
    save("b.xml", text);
    job j = plan_file("b.xml", "fab sides both", NULL);
    assert_ok(lstub_board_write(j.board, j.plan, "c.xml", &err), err);
    char *copy = content("c.xml");
    ck_assert_str_eq(copy, text);
    free(copy);
    free(text);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(names_do_not_collide)
{
    enter_folder("names");
    char *text = spell(&spellings[0], "the last thing", "      <Spec name=\"BACKDRILL_TOP_007\"/><Spec name=\"BACKDRILL_BOTTOM_x\"/>");
    save("b.xml", text);
    free(text);
    job j = plan_file("b.xml", rules_text, NULL);
    assert_ok(lstub_board_write(j.board, j.plan, "written.xml", &err), err);
    assert_read_back(&j, "written.xml");
    text = content("written.xml");
    ck_assert_uint_eq(count_of(text, "Spec name=\"BACKDRILL_TOP_007\""), 1);
    ck_assert_uint_eq(count_of(text, "Spec name=\"BACKDRILL_TOP_8\"") + count_of(text, "Spec name=\"BACKDRILL_BOTTOM_8\""), 1);
    free(text);
    release(&j);

    /* Written a second time, the board has nothing left to drill: what was drilled passes, or may not be drilled again. */
    j = plan_file("written.xml", rules_text, NULL);
    ck_assert_int_eq(planned_drills(&j), 0);
    release(&j);
    leave_folder();
}
END_TEST

/* ---- what stops it ------------------------------------------------------------------------------- */

START_TEST(source_that_changed)
{
    enter_folder("changed");
    job j = plan_small(&spellings[0], NULL);
    save("kept.xml", "what stood here");
    command("printf ' ' >> '%s'%s", spellings[0].name, "");
    assert_refused(lstub_board_write(j.board, j.plan, "kept.xml", &err), LSTUB_E_FORMAT, err, "mm.xml|changed");
    save(spellings[0].name, "<IPC-2581><Ecad>");
    assert_refused(lstub_board_write(j.board, j.plan, "kept.xml", &err), LSTUB_E_FORMAT, err, "mm.xml|changed");
    remove(spellings[0].name);
    assert_refused(lstub_board_write(j.board, j.plan, "kept.xml", &err), LSTUB_E_READ, err, "mm.xml|No such file");
    char *kept = content("kept.xml");
    ck_assert_str_eq(kept, "what stood here");
    free(kept);
    ck_assert_uint_eq(files_here(), 1);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(other_encodings)
{
    static const spelling latin = {"l.xml", "\n", "", "MILLIMETER", "<?xml version=\"1.0\" encoding=\"ISO-8859-1\"?>", 1e-3};
    enter_folder("encoding");
    job j = plan_small(&latin, NULL);
    assert_refused(lstub_board_write(j.board, j.plan, "o.xml", &err), LSTUB_E_UNSUPPORTED, err, "l.xml|ISO-8859-1|UTF-8");
    release(&j);
    char *text = spell(&latin, NULL, NULL);
    size_t n = strlen(text);
    FILE *file = fopen("w.xml", "wb");
    const char *start = text + strlen(latin.head);
    fwrite("\xFF\xFE", 1, 2, file);
    for (; *start != '\0'; start++) {
        fputc(*start, file);
        fputc(0, file);
    }
    ck_assert_int_gt((long)n, 0);
    fclose(file);
    free(text);
    j = plan_file("w.xml", rules_text, NULL);
    assert_refused(lstub_board_write(j.board, j.plan, "o.xml", &err), LSTUB_E_UNSUPPORTED, err, "w.xml|UTF-16");
    release(&j);
    ck_assert_uint_eq(files_here(), 2);
    leave_folder();
}
END_TEST

START_TEST(wrong_arguments)
{
    char text[10];
    size_t needed = 77;
    enter_folder("arguments");
    job j = plan_small(&spellings[0], NULL), other;
    lstub_plan *plan = NULL;
    save("empty.xml", "");
    assert_refused(lstub_board_write(NULL, j.plan, "o.xml", &err), LSTUB_E_NULL, err, "board");
    assert_refused(lstub_board_write(j.board, NULL, "o.xml", &err), LSTUB_E_NULL, err, "plan");
    assert_refused(lstub_board_write(j.board, j.plan, NULL, &err), LSTUB_E_NULL, err, "path");
    assert_refused(lstub_board_write_plan_csv(j.board, j.plan, NULL, &err), LSTUB_E_NULL, err, "path");
    assert_refused(lstub_board_write_drill_csv(NULL, j.plan, "o.csv", &err), LSTUB_E_NULL, err, "board");
    assert_refused(lstub_board_summary(j.board, j.plan, NULL, 0, NULL, &err), LSTUB_E_NULL, err, "needed");
    assert_refused(lstub_board_plan(NULL, j.rules, NULL, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "board");
    assert_refused(lstub_board_plan(j.board, NULL, NULL, NULL, NULL, &plan, &err), LSTUB_E_NULL, err, "capability");
    assert_refused(lstub_board_plan(j.board, j.rules, NULL, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    char *smaller = spell(&spellings[0], "the last thing", "<!-- -->");
    char *cut = strstr(smaller, "            <Hole name=\"H1\""), *end = strchr(cut, '\n');
    memmove(cut, end, strlen(end) + 1);
    save("smaller.xml", smaller);
    free(smaller);
    other = plan_file("smaller.xml", rules_text, NULL);
    assert_refused(lstub_board_write(j.board, other.plan, "o.xml", &err), LSTUB_E_ARGUMENT, err, "plan of 9 vias|10 plated holes");
    assert_refused(lstub_board_write_plan_csv(j.board, other.plan, "o.csv", &err), LSTUB_E_ARGUMENT, err, "plan of 9 vias");
    assert_refused(lstub_board_summary(j.board, other.plan, text, sizeof text, &needed, &err), LSTUB_E_ARGUMENT, err, "plan of 9 vias");
    ck_assert_uint_eq(needed, 77);
    ck_assert_uint_eq(files_here(), 3);
    release(&other);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(places_that_cannot_be_written)
{
    enter_folder("places");
    job j = plan_small(&spellings[0], NULL);
    ck_assert_int_eq(mkdir("folder", 0755), 0);
    ck_assert_int_eq(symlink("nowhere/at/all", "dangling"), 0);
    for (int which = 0; which < 3; which++) {
        assert_refused(write_all_three(&j, "missing/o.x", which), LSTUB_E_WRITE, err, "missing/o.x|No such file");
        assert_refused(write_all_three(&j, "folder", which), LSTUB_E_WRITE, err, "'folder'|directory");
        assert_refused(write_all_three(&j, "mm.xml/o.x", which), LSTUB_E_WRITE, err, "mm.xml/o.x|Not a directory");
        assert_refused(write_all_three(&j, "dangling", which), LSTUB_E_WRITE, err, "dangling|No such file");
        assert_refused(write_all_three(&j, "", which), LSTUB_E_WRITE, err, "''|No such file");
        assert_refused(write_all_three(&j, "/dev/full", which), LSTUB_E_WRITE, err, "/dev/full|No space left");
        assert_ok(write_all_three(&j, "/dev/null", which), err);
        if (geteuid() != 0) {   /* the superuser may write anywhere */
            save("locked", "as it was");
            chmod("locked", 0444);
            assert_refused(write_all_three(&j, "locked", which), LSTUB_E_WRITE, err, "locked|Permission denied");
            remove("locked");
            chmod("folder", 0555);
            assert_refused(write_all_three(&j, "folder/o.x", which), LSTUB_E_WRITE, err, "folder/o.x|Permission denied");
            chmod("folder", 0755);
        }
    }
    struct stat full;
    ck_assert(stat("/dev/null", &full) == 0 && S_ISCHR(full.st_mode));   /* not replaced by a file */
    ck_assert_uint_eq(files_here(), 3);
    release(&j);
    leave_folder();
}
END_TEST

/* The disk runs full at any point: a limit on the size of files stands in for it. */
START_TEST(disk_full_keeps_what_was_there)
{
    static const char *const names[] = {"o.xml", "plan.csv", "drill.csv", "o.xml.gz"};
    struct rlimit was, limit;
    enter_folder("full");
    job j = plan_small(&spellings[0], NULL);
    ck_assert_int_eq(getrlimit(RLIMIT_FSIZE, &was), 0);
    signal(SIGXFSZ, SIG_IGN);
    for (int which = 0; which < 4; which++) {
        save(names[which], "what stood here");
        for (rlim_t bytes = 0; bytes < 150; bytes += 37) {
            limit = was;
            limit.rlim_cur = bytes;
            ck_assert_int_eq(setrlimit(RLIMIT_FSIZE, &limit), 0);
            LSTUB_INIT(err);
            int32_t status = write_all_three(&j, names[which], which % 3);
            ck_assert_int_eq(setrlimit(RLIMIT_FSIZE, &was), 0);
            ck_assert_msg(status == LSTUB_E_WRITE, "%s at %d bytes: %s", names[which], (int)bytes, lstub_status_name(status));
            ck_assert_msg(strstr(err.message, names[which]) != NULL && strstr(err.message, "too large") != NULL, "%s", err.message);
            char *kept = content(names[which][5] == '.' ? "o.xml" : names[which]);
            ck_assert_str_eq(kept, "what stood here");
            free(kept);
        }
    }
    ck_assert_uint_eq(files_here(), 5);
    assert_ok(lstub_board_write(j.board, j.plan, "o.xml", &err), err);
    assert_read_back(&j, "o.xml");
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(links_and_modes)
{
    struct stat info;
    enter_folder("links");
    job j = plan_small(&spellings[0], NULL);
    ck_assert_int_eq(mkdir("folder", 0755), 0);
    save("folder/real.csv", "old");
    chmod("folder/real.csv", 0640);
    ck_assert_int_eq(symlink("folder/real.csv", "link.csv"), 0);
    assert_ok(lstub_board_write_plan_csv(j.board, j.plan, "link.csv", &err), err);
    ck_assert(lstat("link.csv", &info) == 0 && S_ISLNK(info.st_mode));
    ck_assert(stat("folder/real.csv", &info) == 0 && (info.st_mode & 0777) == 0640 && info.st_size > 1000);
    mode_t mask = umask(022);
    assert_ok(lstub_board_write_plan_csv(j.board, j.plan, "new.csv", &err), err);
    ck_assert(stat("new.csv", &info) == 0 && (info.st_mode & 0777) == 0644);
    umask(mask);
    release(&j);
    leave_folder();
}
END_TEST

START_TEST(out_of_memory)
{
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    enter_folder("memory");
    job j = plan_small(&spellings[0], &allocator);
    save("kept", "what stood here");
    for (int which = 0; which < 3; which++) {
        int done = 0;
        for (long more = 1; !done; more++) {
            long live = memory.live;
            LSTUB_INIT(err);
            memory.fail_at = memory.calls + more;
            done = write_all_three(&j, "kept", which) == LSTUB_OK;
            ck_assert_msg(done || err.status == LSTUB_E_MEMORY, "allocation %ld: %s", more, err.message);
            ck_assert_int_eq(memory.live, live);
            ck_assert_int_lt(more, 1000);
            char *kept = content("kept");
            ck_assert_int_eq(strcmp(kept, "what stood here") == 0, !done);
            free(kept);
        }
        memory.fail_at = 0;
        save("kept", "what stood here");
    }
    ck_assert_uint_eq(files_here(), 2);
    release(&j);
    ck_assert_int_eq(memory.live, 0);
    leave_folder();
}
END_TEST
int main(void)
{
    Suite *suite = suite_create("board_output");
    TCase *tests = tcase_create("board_output");
    tcase_set_timeout(tests, 120);
    tcase_add_loop_test(tests, written_board_reads_back, 0, (int)COUNT(spellings));
    tcase_add_test(tests, everything_else_is_as_it_was);
    tcase_add_test(tests, holes_of_pad_stacks);
    tcase_add_test(tests, nothing_to_drill_is_a_copy);
    tcase_add_test(tests, names_do_not_collide);
    tcase_add_test(tests, source_that_changed);
    tcase_add_test(tests, other_encodings);
    tcase_add_test(tests, wrong_arguments);
    tcase_add_test(tests, places_that_cannot_be_written);
    tcase_add_test(tests, disk_full_keeps_what_was_there);
    tcase_add_test(tests, links_and_modes);
    tcase_add_test(tests, out_of_memory);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
