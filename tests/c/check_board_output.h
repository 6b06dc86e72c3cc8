/* What the suites of what a planned board writes share: a small board, its file in several spellings, files and plans. */
#ifndef CHECK_BOARD_OUTPUT_H
#define CHECK_BOARD_OUTPUT_H

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

static inline void put(out_file *f, const char *text, size_t n)
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

static inline void put_line(out_file *f, const char *line)
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

static inline void put_traces(out_file *f)
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

static inline void put_holes(out_file *f)
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
static inline void put_pads(out_file *f)
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

static inline char *spell(const spelling *s, const char *instead_of, const char *put_there)
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

static inline void command(const char *format, const char *a, const char *b)
{
    char text[600];
    snprintf(text, sizeof text, format, a, b);
    ck_assert_msg(system(text) == 0, "%s", text);
}

static inline void save(const char *path, const char *text)
{
    FILE *file = fopen(path, "wb");
    ck_assert_ptr_nonnull(file);
    ck_assert_uint_eq(fwrite(text, 1, strlen(text), file), strlen(text));
    fclose(file);
}

/* A file as text, unpacked if need be. */
static inline char *content(const char *path)
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
static inline void enter_folder(const char *name)
{
    char text[200];
    snprintf(text, sizeof text, "rm -rf 'board_output_%s' && mkdir 'board_output_%s'", name, name);
    ck_assert_int_eq(system(text), 0);
    snprintf(text, sizeof text, "board_output_%s", name);
    ck_assert_int_eq(chdir(text), 0);
    LSTUB_INIT(err);
}

static inline void leave_folder(void) { ck_assert_int_eq(chdir(".."), 0); }

static inline size_t files_here(void)
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

static inline job plan_file(const char *path, const char *rules, const lstub_allocator *allocator)
{
    job j = {NULL, NULL, NULL};
    assert_ok(lstub_rules_parse(rules, strlen(rules), NULL, &j.rules, &err), err);
    assert_ok(lstub_board_load(path, j.rules, NULL, allocator, &j.board, &err), err);
    assert_ok(lstub_board_plan(j.board, j.rules, NULL, LOADED, NULL, &j.plan, &err), err);
    return j;
}

static inline void release(job *j)
{
    lstub_plan_destroy(j->plan);
    lstub_board_destroy(j->board);
    lstub_rules_destroy(j->rules);
}

/* The small board saved and planned. */
static inline job plan_small(const spelling *s, const lstub_allocator *allocator)
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

static inline lstub_decision decision_of(const job *j, size_t index)
{
    lstub_decision d;
    LSTUB_INIT(d);
    assert_ok(lstub_plan_decision(j->plan, index, &d, &err), err);
    return d;
}

/* The written board holds the same holes, each with the drills it had and those of the plan, to 1 nm. */
static inline int64_t assert_read_back(const job *j, const char *path)
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

static inline int64_t planned_drills(const job *j)
{
    lstub_plan_summary totals;
    LSTUB_INIT(totals);
    assert_ok(lstub_plan_totals(j->plan, &totals, &err), err);
    return totals.drill_top + totals.drill_bottom + 2 * totals.drill_both;
}

static inline int32_t write_all_three(const job *j, const char *path, int which)
{
    return which == 0   ? lstub_board_write(j->board, j->plan, path, &err)
           : which == 1 ? lstub_board_write_plan_csv(j->board, j->plan, path, &err)
                        : lstub_board_write_drill_csv(j->board, j->plan, path, &err);
}

#endif
