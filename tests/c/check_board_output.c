/* A board planned and written out: the same file with its back-drills, tables, summary, and what stops them. */
#define _POSIX_C_SOURCE 200809L
#include "check_util.h"

#include "libstub_ipc2581.h"

#include <dirent.h>
#include <locale.h>
#include <signal.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

static lstub_error err;

/* ---- a small board ------------------------------------------------------------------------------- */

/* How a board file is spelled. In the text below ~ is the prefix of elements, [x] a length in mm, and what stands in
   front of a line or ends it is left out where `line` is empty. */
typedef struct spelling {
    const char *name, *line, *prefix, *units, *head;
    double      unit;                      /* m */
} spelling;

#define DECLARED "<?xml version=\"1.0\" encoding=\"UTF-8\"?>"

static const spelling spellings[] = {
    {"mm.xml", "\n", "", "MILLIMETER", DECLARED, 1e-3},
    {"inch.xml", "\r\n", "b:", "INCH", DECLARED, 0.0254},
    {"micron.xml", "", "", "MICRON", "\xEF\xBB\xBF", 1e-6},
    {"packed.xml.gz", "\n", "", "MILLIMETER", DECLARED, 1e-3},
};

static const char *const board_text[] = {
    "<~IPC-2581 revision=\"C\" xmlns@=\"http://webstds.ipc.org/2581\">",
    "  <~Content roleRef=\"Owner\">",
    "    <~FunctionMode mode=\"FABRICATION\"/>",
    "    <~StepRef name=\"SMALL\"/>",
    "    <~DictionaryLineDesc units=\"#\">",
    "      <~EntryLineDesc id=\"W\"><~LineDesc lineEnd=\"ROUND\" lineWidth=\"[0.1]\"/></~EntryLineDesc>",
    "    </~DictionaryLineDesc>",
    "  </~Content>",
    "  <~Ecad name=\"Design\">",
    "    <~CadHeader units=\"#\">",
    "      <~Spec name=\"RESIN\">",
    "        <~Dielectric type=\"DIELECTRIC_CONSTANT\"><~Property value=\"3.7\"/></~Dielectric>",
    "        <~Dielectric type=\"LOSS_TANGENT\"><~Property value=\"0.005\"/></~Dielectric>",
    "      </~Spec>",
    "      <!-- the last thing of the header -->",
    "    </~CadHeader>",
    "    <~CadData>",
    "      <~Layer name=\"L1\" layerFunction=\"CONDUCTOR\" side=\"TOP\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"D1\" layerFunction=\"DIELPREG\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"L2\" layerFunction=\"PLANE\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"D2\" layerFunction=\"DIELCORE\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"L3 &lt;&amp;&quot;&gt;\" layerFunction=\"SIGNAL\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"D3\" layerFunction=\"DIELPREG\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"L4\" layerFunction=\"SIGNAL\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"D4\" layerFunction=\"DIELCORE\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"L5\" layerFunction=\"PLANE\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"D5\" layerFunction=\"DIELPREG\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"L6\" layerFunction=\"CONDUCTOR\" side=\"BOTTOM\" polarity=\"POSITIVE\"/>",
    "      <~Layer name=\"DRILL\" layerFunction=\"DRILL\" side=\"ALL\" polarity=\"POSITIVE\">",
    "        <~Span fromLayer=\"L1\" toLayer=\"L6\"/>",
    "      </~Layer>",
    "      <~Stackup name=\"S\" overallThickness=\"[2.18]\" whereMeasured=\"METAL\">",
    "        <~StackupGroup name=\"G\" thickness=\"[2.18]\">",
    "          <~StackupLayer layerOrGroupRef=\"L1\" thickness=\"[0.03]\" sequence=\"1\"/>",
    "          <~StackupLayer layerOrGroupRef=\"D1\" thickness=\"[0.4]\" sequence=\"2\"><~SpecRef id=\"RESIN\"/></~StackupLayer>",
    "          <~StackupLayer layerOrGroupRef=\"L2\" thickness=\"[0.03]\" sequence=\"3\"/>",
    "          <~StackupLayer layerOrGroupRef=\"D2\" thickness=\"[0.4]\" sequence=\"4\"><~SpecRef id=\"RESIN\"/></~StackupLayer>",
    "          <~StackupLayer layerOrGroupRef=\"L3 &lt;&amp;&quot;&gt;\" thickness=\"[0.03]\" sequence=\"5\"/>",
    "          <~StackupLayer layerOrGroupRef=\"D3\" thickness=\"[0.4]\" sequence=\"6\"><~SpecRef id=\"RESIN\"/></~StackupLayer>",
    "          <~StackupLayer layerOrGroupRef=\"L4\" thickness=\"[0.03]\" sequence=\"7\"/>",
    "          <~StackupLayer layerOrGroupRef=\"D4\" thickness=\"[0.4]\" sequence=\"8\"><~SpecRef id=\"RESIN\"/></~StackupLayer>",
    "          <~StackupLayer layerOrGroupRef=\"L5\" thickness=\"[0.03]\" sequence=\"9\"/>",
    "          <~StackupLayer layerOrGroupRef=\"D5\" thickness=\"[0.4]\" sequence=\"10\"><~SpecRef id=\"RESIN\"/></~StackupLayer>",
    "          <~StackupLayer layerOrGroupRef=\"L6\" thickness=\"[0.03]\" sequence=\"11\"/>",
    "        </~StackupGroup>",
    "      </~Stackup>",
    "      <~Step name=\"SMALL\">",
    "%",
    "      </~Step>",
    "    </~CadData>",
    "  </~Ecad>",
    "</~IPC-2581>",
};

/* The holes: where each connects, and how they stand together in Sets. Each begins at x = 2 mm times its number. */
typedef struct small_hole {
    const char *net;                       /* as in the file */
    int         from, to;                  /* layers 1 to 6; 0: no trace */
    int         new_set;
} small_hole;

static const small_hole small_holes[] = {
    {"FAST_A", 1, 3, 1}, {"+3V3", 0, 0, 1}, {"FAST_B", 1, 3, 1}, {"FAST_B", 1, 6, 0}, {"FAST_B", 1, 3, 0}, {"FAST_B", 3, 4, 0},
    {"FAST_C", 3, 4, 1}, {"=FAST(D1)", 1, 3, 1}, {"FAST,&quot;E&quot;", 4, 6, 1}, {"FAST_F", 1, 6, 1},
};

static const char rules_text[] =
    "signal FAST symbol_rate 56 GBd levels 2 notch_over_nyquist 2 added_loss 0.3 dB\n"
    "net *FAST* FAST\n"
    "default antipad 0.75 mm\n"
    "default in_plane_ratio 1.1\n"
    "fab depth_tolerance 0.03 mm\n"
    "fab cut_clearance 0.05 mm\n"
    "fab residual_target 0.1 mm\n";

typedef struct out_file {
    char  *text;
    size_t used, room;
    const spelling *s;
} out_file;

static void put(out_file *f, const char *text, size_t n)
{
    if (f->used + n + 1 > f->room) {
        f->room = 2 * (f->used + n + 1);
        f->text = realloc(f->text, f->room);
        ck_assert_ptr_nonnull(f->text);
    }
    memcpy(f->text + f->used, text, n);
    f->used += n;
    f->text[f->used] = '\0';
}

static void put_line(out_file *f, const char *line)
{
    char number[40];
    if (f->s->line[0] == '\0')
        line += strspn(line, " ");
    for (; *line != '\0'; line++) {
        if (*line == '~') {
            put(f, f->s->prefix, strlen(f->s->prefix));
        } else if (*line == '#') {
            put(f, f->s->units, strlen(f->s->units));
        } else if (*line == '@') {
            if (f->s->prefix[0] != '\0') {
                put(f, ":", 1);
                put(f, f->s->prefix, strlen(f->s->prefix) - 1);
            }
        } else if (*line == '[') {
            snprintf(number, sizeof number, "%.12g", strtod(line + 1, NULL) * 1e-3 / f->s->unit);
            put(f, number, strlen(number));
            line = strchr(line, ']');
        } else {
            put(f, line, 1);
        }
    }
    put(f, f->s->line, strlen(f->s->line));
}

static const char *const layer_refs[] = {"", "L1", "L2", "L3 &lt;&amp;&quot;&gt;", "L4", "L5", "L6"};

static void put_traces(out_file *f)
{
    char line[256];
    for (int layer = 1; layer <= 6; layer++) {
        snprintf(line, sizeof line, "        <~LayerFeature layerRef=\"%s\">", layer_refs[layer]);
        put_line(f, line);
        for (size_t i = 0; i < COUNT(small_holes); i++) {
            const small_hole *h = &small_holes[i];
            if (h->from != layer && h->to != layer)
                continue;
            snprintf(line, sizeof line,
                     "          <~Set net=\"%s\"><~Features><~Location x=\"0\" y=\"0\"/><~Polyline><~PolyBegin x=\"[%d]\" y=\"[5]\"/>"
                     "<~PolyStepSegment x=\"[%d]\" y=\"[%d]\"/><~LineDescRef id=\"W\"/></~Polyline></~Features></~Set>",
                     h->net, 2 * (int)i, 2 * (int)i, layer % 2 ? 9 : 1);
            put_line(f, line);
        }
        put_line(f, "        </~LayerFeature>");
    }
}

static void put_holes(out_file *f)
{
    char line[256];
    put_line(f, "        <~LayerFeature layerRef=\"DRILL\">");
    put_line(f, "          <~Set><~Hole name=\"T\" diameter=\"[3]\" platingStatus=\"NONPLATED\" plusTol=\"0\" minusTol=\"0\" x=\"[-9]\" y=\"[0]\"/></~Set>");
    for (size_t i = 0; i < COUNT(small_holes); i++) {
        const small_hole *h = &small_holes[i];
        if (h->new_set) {
            snprintf(line, sizeof line, "          <~Set net=\"%s\" geometry=\"V25\">", h->net);
            put_line(f, line);
            put_line(f, "            <~ColorRef id=\"C\"/>");
        }
        snprintf(line, sizeof line,
                 "            <~Hole name=\"H%d\" diameter=\"[0.25]\" platingStatus=\"VIA\" plusTol=\"0\" minusTol=\"0\" x=\"[%d]\" y=\"[5]\"/>",
                 (int)i, 2 * (int)i);
        put_line(f, line);
        if (i + 1 == COUNT(small_holes) || small_holes[i + 1].new_set)
            put_line(f, "          </~Set>");
    }
    put_line(f, "        </~LayerFeature>");
}

/* The same holes, but for the bare one, as pads of a pad stack that has the hole: no Hole element anywhere. */
static void put_pads(out_file *f)
{
    char line[256];
    put_line(f, "        <~PadStackDef name=\"V25\">");
    put_line(f, "          <~PadstackHoleDef name=\"H\" diameter=\"[0.25]\" platingStatus=\"VIA\" plusTol=\"0\" minusTol=\"0\" x=\"0\" y=\"0\"/>");
    put_line(f, "        </~PadStackDef>");
    put_line(f, "        <~LayerFeature layerRef=\"L1\">");
    for (size_t i = 0; i < COUNT(small_holes); i++) {
        snprintf(line, sizeof line, "          <~Set net=\"%s\"><~Pad padstackDefRef=\"V25\"><~Location x=\"[%d]\" y=\"[5]\"/></~Pad></~Set>",
                 small_holes[i].net, 2 * (int)i);
        put_line(f, line);
    }
    put_line(f, "        </~LayerFeature>");
}

static const char with_pads[] = "";

static char *spell(const spelling *s, const char *instead_of, const char *put_there)
{
    out_file f = {NULL, 0, 0, s};
    put(&f, s->head, strlen(s->head));
    for (size_t i = 0; i < COUNT(board_text); i++) {
        if (instead_of != NULL && strstr(board_text[i], instead_of) != NULL) {
            put_line(&f, put_there);
        } else if (strcmp(board_text[i], "%") == 0) {
            if (put_there == with_pads)
                put_pads(&f);
            else
                put_holes(&f);
            put_traces(&f);
        } else {
            put_line(&f, board_text[i]);
        }
    }
    return f.text;
}

/* ---- files --------------------------------------------------------------------------------------- */

static void command(const char *format, const char *a, const char *b)
{
    char text[600];
    snprintf(text, sizeof text, format, a, b);
    ck_assert_msg(system(text) == 0, "%s", text);
}

static void save(const char *path, const char *text)
{
    FILE *file = fopen(path, "wb");
    ck_assert_ptr_nonnull(file);
    ck_assert_uint_eq(fwrite(text, 1, strlen(text), file), strlen(text));
    fclose(file);
}

/* A file as text, unpacked if need be. */
static char *content(const char *path)
{
    char unpacked[300];
    size_t n = strlen(path), bytes = 0;
    char *text = NULL;
    FILE *file;
    if (n > 3 && strcmp(path + n - 3, ".gz") == 0) {
        snprintf(unpacked, sizeof unpacked, "%s.unpacked", path);
        command("gzip -dc '%s' > '%s'", path, unpacked);
        path = unpacked;
    }
    file = fopen(path, "rb");
    ck_assert_msg(file != NULL, "%s", path);
    do {
        text = realloc(text, bytes + 65537);
        n = fread(text + bytes, 1, 65536, file);
        bytes += n;
    } while (n > 0);
    text[bytes] = '\0';
    fclose(file);
    return text;
}

/* Every test works in a folder of its own, empty when it begins. */
static void enter_folder(const char *name)
{
    char text[200];
    snprintf(text, sizeof text, "rm -rf 'board_output_%s' && mkdir 'board_output_%s'", name, name);
    ck_assert_int_eq(system(text), 0);
    snprintf(text, sizeof text, "board_output_%s", name);
    ck_assert_int_eq(chdir(text), 0);
    LSTUB_INIT(err);
}

static void leave_folder(void) { ck_assert_int_eq(chdir(".."), 0); }

static size_t files_here(void)
{
    size_t count = 0;
    DIR *folder = opendir(".");
    struct dirent *entry;
    ck_assert_ptr_nonnull(folder);
    while ((entry = readdir(folder)) != NULL)
        count += strcmp(entry->d_name, ".") != 0 && strcmp(entry->d_name, "..") != 0;
    closedir(folder);
    return count;
}

typedef struct job {
    lstub_rules *rules;
    lstub_board *board;
    lstub_plan  *plan;
} job;

static job plan_file(const char *path, const char *rules, const lstub_allocator *allocator)
{
    job j = {NULL, NULL, NULL};
    assert_ok(lstub_rules_parse(rules, strlen(rules), NULL, &j.rules, &err), err);
    assert_ok(lstub_board_load(path, j.rules, NULL, allocator, &j.board, &err), err);
    assert_ok(lstub_board_plan(j.board, j.rules, NULL, LOADED, NULL, &j.plan, &err), err);
    return j;
}

static void release(job *j)
{
    lstub_plan_destroy(j->plan);
    lstub_board_destroy(j->board);
    lstub_rules_destroy(j->rules);
}

/* The small board saved and planned. */
static job plan_small(const spelling *s, const lstub_allocator *allocator)
{
    char *text = spell(s, NULL, NULL);
    size_t n = strlen(s->name);
    if (strcmp(s->name + n - 3, ".gz") == 0) {
        save("plain", text);
        command("gzip -c '%s' > '%s'", "plain", s->name);
    } else {
        save(s->name, text);
    }
    free(text);
    return plan_file(s->name, rules_text, allocator);
}

static lstub_decision decision_of(const job *j, size_t index)
{
    lstub_decision d;
    LSTUB_INIT(d);
    assert_ok(lstub_plan_decision(j->plan, index, &d, &err), err);
    return d;
}

/* ---- the board file ------------------------------------------------------------------------------ */

/* The written board holds the same holes, each with the drills it had and those of the plan, to 1 nm. */
static int64_t assert_read_back(const job *j, const char *path)
{
    lstub_board *again = NULL;
    int64_t drills = 0;
    assert_ok(lstub_board_load(path, j->rules, NULL, NULL, &again, &err), err);
    ck_assert_uint_eq(lstub_board_hole_count(again), lstub_board_hole_count(j->board));
    for (size_t i = 0; i < lstub_board_hole_count(again); i++) {
        lstub_decision d = decision_of(j, i);
        lstub_hole was, is;
        lstub_via before, after;
        LSTUB_INIT(was);
        LSTUB_INIT(is);
        LSTUB_INIT(before);
        LSTUB_INIT(after);
        assert_ok(lstub_board_hole(j->board, i, &was, &err), err);
        assert_ok(lstub_board_hole(again, i, &is, &err), err);
        ck_assert_str_eq(was.name, is.name);
        ck_assert_str_eq(was.net, is.net);
        ck_assert_str_eq(was.padstack, is.padstack);
        ck_assert(was.x == is.x && was.y == is.y && was.status == is.status);
        assert_ok(lstub_board_via(j->board, i, &before, &err), err);
        assert_ok(lstub_board_via(again, i, &after, &err), err);
        ck_assert_msg(after.backdrill_count == before.backdrill_count + (size_t)d.top.drilled + (size_t)d.bottom.drilled,
                      "hole %s: %d drills", is.name, (int)after.backdrill_count);
        for (size_t k = 0; k < after.backdrill_count; k++) {
            const lstub_backdrill *drill = &after.backdrills[k];
            const lstub_drill_cut *cut = drill->side == LSTUB_SIDE_TOP ? &d.top : &d.bottom;
            if (!cut->drilled)
                continue;
            drills++;
            assert_close(drill->depth, cut->depth, 0.0, 1e-9, "the plan");
            assert_close(drill->diameter, cut->diameter, 0.0, 1e-9, "the plan");
            ck_assert(drill->diameter >= after.drill);
        }
    }
    lstub_board_destroy(again);
    return drills;
}

static int64_t planned_drills(const job *j)
{
    lstub_plan_summary totals;
    LSTUB_INIT(totals);
    assert_ok(lstub_plan_totals(j->plan, &totals, &err), err);
    return totals.drill_top + totals.drill_bottom + 2 * totals.drill_both;
}

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

static int32_t write_all_three(const job *j, const char *path, int which)
{
    return which == 0   ? lstub_board_write(j->board, j->plan, path, &err)
           : which == 1 ? lstub_board_write_plan_csv(j->board, j->plan, path, &err)
                        : lstub_board_write_drill_csv(j->board, j->plan, path, &err);
}

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
