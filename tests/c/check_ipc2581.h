/*
** Small boards in IPC-2581 for the suites of the reader. A board is put together from parts; a test replaces those it
** is about. Numbers in braces, "{0.25}", are millimetres, written in the units that the board is to have; in square
** brackets, "[0.5]", in those of its dictionaries. The suite defines BOARD_FILE, a name of its own: suites may run at once.
*/
#ifndef CHECK_IPC2581_H
#define CHECK_IPC2581_H

#include "libstub_ipc2581.h"

#include "check_util.h"

#define MM 1e-3
#define BY_HAND "by hand from the file"

typedef struct test_xml {
    const char *units, *dictionary_units;   /* NULL: not written */
    const char *root, *content, *specs, *layers, *stackups, *stack, *step, *nets, *copper, *drills, *after;
} test_xml;

/*
** 1.1 mm of board: TOP, GND (a plane), SIG, BOT; a through via V1 of net S at (5, 5), drill 0.25, pads 0.5, antipad 0.8,
** traces on TOP and SIG.
*/
static inline test_xml board_parts(void)
{
    test_xml b = {
        "MILLIMETER", "MILLIMETER", "<IPC-2581 revision=\"C\">",
        /* content */
        "<EntryStandard id=\"PAD\"><Circle diameter=\"[0.5]\"/></EntryStandard>"
        "<EntryStandard id=\"ANTI\"><Circle diameter=\"[0.9]\"/></EntryStandard>"
        "<EntryStandard id=\"SMD\"><RectCenter width=\"[1.2]\" height=\"[0.6]\"/></EntryStandard>"
        "<EntryStandard id=\"RELIEF\"><Donut shape=\"ROUND\" outerDiameter=\"[0.9]\" innerDiameter=\"[0.6]\"/></EntryStandard>",
        /* specs */
        "<Spec name=\"C\"><Conductor type=\"CONDUCTIVITY\"><Property value=\"580000\" unit=\"MHO/CM\"/></Conductor></Spec>"
        "<Spec name=\"E\"><Dielectric type=\"DIELECTRIC_CONSTANT\"><Property value=\"3.6\"/></Dielectric>"
        "<Dielectric type=\"LOSS_TANGENT\"><Property value=\"0.004\"/></Dielectric></Spec>",
        /* layers */
        "<Layer name=\"TOP\" layerFunction=\"CONDUCTOR\" side=\"TOP\" polarity=\"POSITIVE\"/>"
        "<Layer name=\"D1\" layerFunction=\"DIELPREG\"/>"
        "<Layer name=\"GND\" layerFunction=\"PLANE\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>"
        "<Layer name=\"D2\" layerFunction=\"DIELCORE\"/>"
        "<Layer name=\"SIG\" layerFunction=\"CONDUCTOR\" side=\"INTERNAL\" polarity=\"POSITIVE\"/>"
        "<Layer name=\"D3\" layerFunction=\"DIELPREG\"/>"
        "<Layer name=\"BOT\" layerFunction=\"CONDUCTOR\" side=\"BOTTOM\" polarity=\"POSITIVE\"/>"
        "<Layer name=\"DRILL\" layerFunction=\"DRILL\"><Span fromLayer=\"TOP\" toLayer=\"BOT\"/></Layer>",
        NULL,
        /* stack */
        "<StackupLayer layerOrGroupRef=\"TOP\" thickness=\"{0.05}\" sequence=\"1\"><SpecRef id=\"C\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"D1\" thickness=\"{0.2}\" tolPlus=\"{0.01}\" tolMinus=\"{0.02}\" sequence=\"2\"><SpecRef id=\"E\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"GND\" thickness=\"{0.05}\" sequence=\"3\"><SpecRef id=\"C\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"D2\" thickness=\"{0.3}\" sequence=\"4\"><SpecRef id=\"E\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"SIG\" thickness=\"{0.05}\" sequence=\"5\"><SpecRef id=\"C\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"D3\" thickness=\"{0.4}\" sequence=\"6\"><SpecRef id=\"E\"/></StackupLayer>"
        "<StackupLayer layerOrGroupRef=\"BOT\" thickness=\"{0.05}\" sequence=\"7\"><SpecRef id=\"C\"/></StackupLayer>",
        "", "",
        /* copper */
        "<LayerFeature layerRef=\"TOP\">"
        "<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Polyline><PolyBegin x=\"{2}\" y=\"{5}\"/>"
        "<PolyStepSegment x=\"{5}\" y=\"{5}\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>"
        "<Set net=\"S\"><Pad padstackDefRef=\"VIA\"><Location x=\"{5}\" y=\"{5}\"/><StandardPrimitiveRef id=\"PAD\"/></Pad></Set></LayerFeature>"
        "<LayerFeature layerRef=\"GND\"><Set net=\"G\"><Features><Location x=\"0\" y=\"0\"/><Contour><Polygon>"
        "<PolyBegin x=\"{0}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{10}\"/>"
        "<PolyStepSegment x=\"{0}\" y=\"{10}\"/><PolyStepSegment x=\"{0}\" y=\"{0}\"/></Polygon><Cutout><PolyBegin x=\"{5.4}\" y=\"{5}\"/>"
        "<PolyStepCurve x=\"{4.6}\" y=\"{5}\" centerX=\"{5}\" centerY=\"{5}\" clockwise=\"true\"/>"
        "<PolyStepCurve x=\"{5.4}\" y=\"{5}\" centerX=\"{5}\" centerY=\"{5}\" clockwise=\"true\"/></Cutout></Contour></Features></Set></LayerFeature>"
        "<LayerFeature layerRef=\"SIG\">"
        "<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Line startX=\"{5}\" startY=\"{5}\" endX=\"{5}\" endY=\"{9}\"><LineDescRef id=\"L\"/></Line>"
        "</Features></Set>"
        "<Set net=\"S\"><Pad padstackDefRef=\"VIA\"><Location x=\"{5}\" y=\"{5}\"/><StandardPrimitiveRef id=\"PAD\"/></Pad></Set></LayerFeature>"
        "<LayerFeature layerRef=\"BOT\">"
        "<Set net=\"S\"><Pad padstackDefRef=\"VIA\"><Location x=\"{5}\" y=\"{5}\"/><StandardPrimitiveRef id=\"PAD\"/></Pad></Set></LayerFeature>",
        /* drills */
        "<LayerFeature layerRef=\"DRILL\"><Set net=\"S\" geometry=\"VIA\">"
        "<Hole name=\"V1\" diameter=\"{0.25}\" platingStatus=\"VIA\" plusTol=\"0\" minusTol=\"0\" x=\"{5}\" y=\"{5}\"/></Set></LayerFeature>",
        ""};
    return b;
}

/* Parts of boards: holes, features, drill layers. */
#define HOLE(name, net, x, y) \
    "<Set net=\"" net "\" geometry=\"VIA\"><Hole name=\"" name "\" diameter=\"{0.25}\" platingStatus=\"VIA\" x=\"{" x "}\" y=\"{" y "}\"/></Set>"
#define ON(layer, features) "<LayerFeature layerRef=\"" layer "\">" features "</LayerFeature>"
#define TRACE(net, x0, y0, x1, y1) \
    "<Set net=\"" net "\"><Features><Location x=\"0\" y=\"0\"/><Line startX=\"{" x0 "}\" startY=\"{" y0 "}\" endX=\"{" x1 "}\" endY=\"{" y1 "}\">" \
    "<LineDescRef id=\"L\"/></Line></Features></Set>"
#define PAD_OF(net, id, x, y, more) \
    "<Set net=\"" net "\"><Pad padstackDefRef=\"VIA\">" more "<Location x=\"{" x "}\" y=\"{" y "}\"/><StandardPrimitiveRef id=\"" id "\"/></Pad></Set>"
#define SPAN(name, from, to) "<Layer name=\"" name "\" layerFunction=\"DRILL\"><Span fromLayer=\"" from "\" toLayer=\"" to "\"/></Layer>"
#define RECTANGLE(x0, y0, x1, y1) \
    "<PolyBegin x=\"{" x0 "}\" y=\"{" y0 "}\"/><PolyStepSegment x=\"{" x1 "}\" y=\"{" y0 "}\"/><PolyStepSegment x=\"{" x1 "}\" y=\"{" y1 "}\"/>" \
    "<PolyStepSegment x=\"{" x0 "}\" y=\"{" y1 "}\"/><PolyStepSegment x=\"{" x0 "}\" y=\"{" y0 "}\"/>"
#define CIRCLE(x0, x1, x, y) \
    "<PolyBegin x=\"{" x1 "}\" y=\"{" y "}\"/><PolyStepCurve x=\"{" x1 "}\" y=\"{" y "}\" centerX=\"{" x "}\" centerY=\"{" y "}\" clockwise=\"false\"/>"
#define AREA(net, rings) "<Set net=\"" net "\"><Features><Location x=\"0\" y=\"0\"/><Contour>" rings "</Contour></Features></Set>"

static inline double unit_of(const char *units)
{
    return strcmp(units, "INCH") == 0 ? 25.4 : strcmp(units, "MICRON") == 0 ? 1e-3 : 1.0;   /* in mm */
}

static inline void write_text(FILE *file, const char *text, const test_xml *b)
{
    for (; *text != '\0'; text++) {
        const char *units = *text == '{' ? b->units : b->dictionary_units != NULL ? b->dictionary_units : b->units;
        char       *end;
        if (*text == '>') {
            fputs(">\n", file);            /* an element a line: lines can be told in messages */
        } else if (*text == '{' || (*text == '[' && text[1] >= '0' && text[1] <= '9')) {
            fprintf(file, "%.15g", strtod(text + 1, &end) / unit_of(units));
            text = end;
        } else {
            fputc(*text, file);
        }
    }
}

static inline void write_units(FILE *file, const char *element, const char *units)
{
    fprintf(file, units != NULL ? "<%s units=\"%s\">\n" : "<%s>\n", element, units);
}

static inline void write_board(const test_xml *b)
{
    FILE *file = fopen(BOARD_FILE, "wb");
    ck_assert_ptr_nonnull(file);
    write_text(file, "<?xml version=\"1.0\" encoding=\"UTF-8\"?>", b);
    write_text(file, b->root, b);
    write_text(file, "<Content roleRef=\"Owner\"><StepRef name=\"B\"/>", b);
    write_units(file, "DictionaryLineDesc", b->dictionary_units);
    write_text(file, "<EntryLineDesc id=\"L\"><LineDesc lineEnd=\"ROUND\" lineWidth=\"[0.1]\"/></EntryLineDesc></DictionaryLineDesc>", b);
    write_units(file, "DictionaryStandard", b->dictionary_units);
    write_text(file, b->content, b);
    write_text(file, "</DictionaryStandard></Content><Ecad>", b);
    write_units(file, "CadHeader", b->units);
    write_text(file, b->specs, b);
    write_text(file, "</CadHeader><CadData>", b);
    write_text(file, b->layers, b);
    if (b->stackups != NULL) {
        write_text(file, b->stackups, b);
    } else {
        write_text(file, "<Stackup name=\"MAIN\" overallThickness=\"{1.1}\" whereMeasured=\"METAL\"><StackupGroup name=\"G1\">", b);
        write_text(file, b->stack, b);
        write_text(file, "</StackupGroup></Stackup>", b);
    }
    write_text(file, "<Step name=\"B\">", b);
    write_text(file, b->step, b);
    write_text(file, b->copper, b);
    write_text(file, b->drills, b);
    write_text(file, "</Step>", b);
    write_text(file, b->after, b);
    write_text(file, "</CadData></Ecad></IPC-2581>", b);
    ck_assert_int_eq(fclose(file), 0);
}

/* The board as read with these rules (text; NULL: none). */
static inline lstub_board *load_with(const test_xml *b, const char *rules_text, const lstub_board_options *options)
{
    lstub_board *board = NULL;
    lstub_rules *rules = NULL;
    lstub_error  err;
    LSTUB_INIT(err);
    write_board(b);
    if (rules_text != NULL)
        assert_ok(lstub_rules_parse(rules_text, strlen(rules_text), NULL, &rules, &err), err);
    assert_ok(lstub_board_load(BOARD_FILE, rules, options, NULL, &board, &err), err);
    lstub_rules_destroy(rules);
    return board;
}

static inline lstub_board *load(const test_xml *b) { return load_with(b, NULL, NULL); }

/* A notice whose message holds all words (apart by '|'); its count, 0: there is none. */
static inline int64_t noticed(const lstub_board *board, int32_t severity, const char *words)
{
    for (size_t i = 0; i < lstub_board_notice_count(board); i++) {
        lstub_notice notice;
        const char  *w = words;
        char         word[128];
        LSTUB_INIT(notice);
        ck_assert_int_eq(lstub_board_notice(board, i, &notice, NULL), LSTUB_OK);
        while (*w != '\0') {
            size_t n = strcspn(w, "|");
            ck_assert_uint_lt(n, sizeof word);
            memcpy(word, w, n);
            word[n] = '\0';
            if (strstr(notice.message, word) == NULL)
                break;
            w += n + (w[n] == '|');
        }
        if (*w == '\0' && notice.severity == severity)
            return notice.count;
    }
    return 0;
}

static inline lstub_via via_of(const lstub_board *board, const char *name)
{
    lstub_via via;
    LSTUB_INIT(via);
    for (size_t i = 0; i < lstub_board_hole_count(board); i++) {
        lstub_hole hole;
        LSTUB_INIT(hole);
        ck_assert_int_eq(lstub_board_hole(board, i, &hole, NULL), LSTUB_OK);
        if (strcmp(hole.name, name) == 0) {
            ck_assert_int_eq(lstub_board_via(board, i, &via, NULL), LSTUB_OK);
            return via;
        }
    }
    ck_abort_msg("no hole '%s'", name);
    return via;
}

/* Names of the layers where a via connects, "TOP SIG". */
static inline const char *connects_of(const lstub_board *board, const lstub_via *via)
{
    static char text[256];
    text[0] = '\0';
    for (size_t i = 0; i < via->connect_count; i++) {
        lstub_layer layer;
        LSTUB_INIT(layer);
        ck_assert_int_eq(lstub_stackup_layer(lstub_board_stackup(board), via->connects[i], &layer, NULL), LSTUB_OK);
        if (i > 0)
            strcat(text, " ");
        strcat(text, layer.name);
    }
    return text;
}

static inline int32_t layer_of(const lstub_board *board, const char *name)
{
    int32_t index = -1;
    ck_assert_int_eq(lstub_stackup_find(lstub_board_stackup(board), name, &index, NULL), LSTUB_OK);
    return index;
}

/* Value on a layer: its own entry, or else `usual`. */
static inline double on_layer(const lstub_board *board, const lstub_on_layer *list, size_t count, const char *layer, double usual)
{
    for (size_t i = 0; i < count; i++)
        if (list[i].layer == layer_of(board, layer))
            return list[i].value;
    return usual;
}

static inline double antipad_on(const lstub_board *board, const lstub_via *via, const char *layer)
{
    return on_layer(board, via->antipads, via->antipad_count, layer, via->antipad);
}

static inline double clear_on(const lstub_board *board, const lstub_via *via, const char *layer)
{
    return on_layer(board, via->clear, via->clear_count, layer, -1.0);
}

static inline int32_t kind_of(const lstub_board *board, const char *name)
{
    lstub_layer layer;
    LSTUB_INIT(layer);
    ck_assert_int_eq(lstub_stackup_layer(lstub_board_stackup(board), layer_of(board, name), &layer, NULL), LSTUB_OK);
    return layer.kind;
}

static inline int32_t status_of(const lstub_board *board, const char *name)
{
    for (size_t i = 0; i < lstub_board_hole_count(board); i++) {
        lstub_hole hole;
        LSTUB_INIT(hole);
        ck_assert_int_eq(lstub_board_hole(board, i, &hole, NULL), LSTUB_OK);
        if (strcmp(hole.name, name) == 0)
            return hole.status;
    }
    ck_abort_msg("no hole '%s'", name);
    return 0;
}

#endif
