/* The reader of boards: what becomes of each thing a board file can say. */
#include "check_ipc2581.h"

#define BY_HAND "by hand from the file"

static lstub_error err;

/* ---- the board as it should be ------------------------------------------------------------------ */

static void assert_plain(const lstub_board *board)
{
    lstub_via       via = via_of(board, "V1");
    const lstub_stackup *s = lstub_board_stackup(board);
    lstub_stub      stubs[2];
    lstub_interval  whole;
    lstub_hole      hole;
    int32_t         n = 0;
    double          top = 0.0, bottom = 0.0;
    LSTUB_INIT(whole);
    LSTUB_INIT(hole);
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    ck_assert_str_eq(lstub_board_name(board), "B");
    ck_assert_int_eq(lstub_stackup_count(s), 7);
    assert_ok(lstub_stackup_depth(s, 6, &top, &bottom, &err), err);
    assert_close(bottom, 1.1 * MM, 1e-12, 0.0, BY_HAND);
    assert_ok(lstub_stackup_interval(s, 0.05 * MM, 0.25 * MM, &whole, &err), err);
    assert_close(whole.dk_through_plane, 3.6, 1e-12, 0.0, BY_HAND);
    assert_close(whole.loss_tangent, 0.004, 1e-12, 0.0, BY_HAND);
    assert_close(whole.tol_plus, 0.01 * MM, 1e-9, 0.0, BY_HAND);
    assert_close(whole.tol_minus, 0.02 * MM, 1e-9, 0.0, BY_HAND);
    ck_assert_uint_eq(lstub_board_hole_count(board), 1);
    assert_ok(lstub_board_hole(board, 0, &hole, &err), err);
    ck_assert_str_eq(hole.name, "V1");
    ck_assert_str_eq(hole.net, "S");
    ck_assert_str_eq(hole.padstack, "VIA");
    ck_assert_int_eq(hole.kind, LSTUB_HOLE_VIA);
    ck_assert_int_eq(hole.status, LSTUB_OK);
    ck_assert_int_eq(hole.partner, -1);
    assert_close(hole.x, 5.0 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_str_eq(connects_of(board, &via), "TOP SIG");
    assert_close(via.drill, 0.25 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_start, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_inner, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_end, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(antipad_on(board, &via, "GND"), 0.8 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(via.nonfunctional_pads, LSTUB_PADS_REMOVED);
    assert_ok(lstub_via_stubs(s, &via, stubs, sizeof stubs[0], &n, &err), err);
    ck_assert_int_eq(n, 1);
    assert_close(stubs[0].length, 0.45 * MM, 1e-9, 0.0, BY_HAND);
}

/* The same board in every unit, dictionaries in another one or without, gives the same answers. */
START_TEST(units_of_length)
{
    static const char *const units[] = {"MILLIMETER", "INCH", "MICRON"};
    static const char *const dictionary[] = {"MILLIMETER", "INCH", "MICRON", NULL};
    for (size_t i = 0; i < COUNT(units); i++)
        for (size_t j = 0; j < COUNT(dictionary); j++) {
            test_xml b = board_parts();
            b.units = units[i];
            b.dictionary_units = dictionary[j];
            lstub_board *board = load(&b);
            assert_plain(board);
            ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "dictionaries without units") > 0, dictionary[j] == NULL);
            lstub_board_destroy(board);
        }
}
END_TEST

START_TEST(plain_notices)
{
    test_xml     b = board_parts();
    lstub_board *board = load(&b);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "in-plane|1 is used"), 3);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "resin"), 4);
    for (size_t i = 0; i < lstub_board_notice_count(board); i++) {
        lstub_notice notice;
        LSTUB_INIT(notice);
        assert_ok(lstub_board_notice(board, i, &notice, &err), err);
        ck_assert_msg(notice.severity == LSTUB_NOTICE_NOTE, "%s", notice.message);
    }
    lstub_board_destroy(board);
    board = load_with(&b, "default in_plane_ratio 1.2", NULL);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "in-plane"), 0);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(other_namespaces_and_encodings)
{
    test_xml b = board_parts();
    b.root = "<IPC-2581 revision=\"B\" xmlns=\"http://webstds.ipc.org/2581\">";
    lstub_board *board = load(&b);
    assert_plain(board);
    lstub_board_destroy(board);
    b.root = "<IPC-2581 revision=\"Q\">";
    board = load(&b);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "revision 'Q'"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- stackups ----------------------------------------------------------------------------------- */

#define STACK_LAYER(name, thickness, sequence, spec)                                                                  \
    "<StackupLayer layerOrGroupRef=\"" name "\" thickness=\"{" thickness "}\" sequence=\"" sequence "\">"             \
    "<SpecRef id=\"" spec "\"/></StackupLayer>"
#define STACKUP(name, overall, measured, layers)                                                                      \
    "<Stackup name=\"" name "\" overallThickness=\"{" overall "}\" whereMeasured=\"" measured "\">"                   \
    "<StackupGroup name=\"G\">" layers "</StackupGroup></Stackup>"
#define TWO_LAYERS(dielectric) \
    STACK_LAYER("TOP", "0.05", "1", "C") STACK_LAYER("D1", dielectric, "2", "E") STACK_LAYER("BOT", "0.05", "3", "C")

START_TEST(several_stackups)
{
    test_xml            b = board_parts();
    lstub_board_options options;
    lstub_board        *board = NULL;
    b.stackups = STACKUP("RIGID", "0.3", "METAL", TWO_LAYERS("0.2")) STACKUP("FLEX", "0.15", "METAL", TWO_LAYERS("0.05"));
    board = load(&b);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "2 Stackups|'RIGID'"), 1);
    lstub_board_destroy(board);
    LSTUB_INIT(options);
    options.stackup = "FLEX";
    board = load_with(&b, NULL, &options);
    double bottom = 0.0;
    assert_ok(lstub_stackup_depth(lstub_board_stackup(board), 2, NULL, &bottom, &err), err);
    assert_close(bottom, 0.15 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "Stackups"), 0);
    lstub_board_destroy(board);
    options.stackup = "GREEN";
    assert_refused(lstub_board_load(BOARD_FILE, NULL, &options, NULL, &board, &err), LSTUB_E_NONE, err, "stackup|GREEN|RIGID");
}
END_TEST

static int32_t load_stack(const char *specs, const char *stackups, const char *rules, lstub_board **board)
{
    test_xml     b = board_parts();
    lstub_rules *made = NULL;
    if (specs != NULL)
        b.specs = specs;
    b.stackups = stackups;
    write_board(&b);
    LSTUB_INIT(err);
    if (rules != NULL)
        ck_assert_int_eq(lstub_rules_parse(rules, strlen(rules), NULL, &made, NULL), LSTUB_OK);
    *board = NULL;
    int32_t status = lstub_board_load(BOARD_FILE, made, NULL, NULL, board, &err);
    lstub_rules_destroy(made);
    return status;
}

START_TEST(missing_dk)
{
    static const char specs[] = "<Spec name=\"C\"/><Spec name=\"E\"/>";
    lstub_board *board;
    assert_refused(load_stack(specs, STACKUP("M", "0.3", "METAL", TWO_LAYERS("0.2")), NULL, &board), LSTUB_E_FORMAT, err,
                   "line |layer 'D1'|no Dk|default dk");
    ck_assert_int_gt(err.index, 1);
    ck_assert_int_eq(load_stack(specs, STACKUP("M", "0.3", "METAL", TWO_LAYERS("0.2")), "default dk 4.1\ndefault loss_tangent 0.02", &board),
                     LSTUB_OK);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'D1'|no Dk|4.1"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'D1'|no loss tangent|0.02"), 1);
    lstub_interval between;
    LSTUB_INIT(between);
    assert_ok(lstub_stackup_interval(lstub_board_stackup(board), 0.05 * MM, 0.25 * MM, &between, &err), err);
    assert_close(between.dk_through_plane, 4.1, 1e-12, 0.0, BY_HAND);
    assert_close(between.loss_tangent, 0.02, 1e-12, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(values_out_of_range)
{
    lstub_board *board;
    ck_assert_int_eq(load_stack("<Spec name=\"C\"><Conductor type=\"CONDUCTIVITY\"><Property value=\"12\" unit=\"MHO/CM\"/></Conductor></Spec>"
                                "<Spec name=\"E\"><Dielectric type=\"DIELECTRIC_CONSTANT\"><Property value=\"0.5\"/></Dielectric>"
                                "<Dielectric type=\"LOSS_TANGENT\"><Property value=\"7\"/></Dielectric></Spec>",
                                STACKUP("M", "0.3", "METAL", TWO_LAYERS("0.2")), "default dk 4.1", &board), LSTUB_OK);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'D1'|Dk = 0.5|1 to 1000"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'D1'|loss tangent 7"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "taken as lossless"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "conductivity 1200 S/m"), 2);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(resin_and_conductivity)
{
    lstub_board *board;
    lstub_layer  layer;
    ck_assert_int_eq(load_stack("<Spec name=\"C\"><Conductor type=\"CONDUCTIVITY\"><Property value=\"5.1e7\" unit=\"SIEMENS/M\"/></Conductor>"
                                "<Dielectric type=\"DIELECTRIC_CONSTANT\"><Property value=\"3.1\"/></Dielectric>"
                                "<Dielectric type=\"LOSS_TANGENT\"><Property value=\"0.01\"/></Dielectric></Spec>"
                                "<Spec name=\"E\"><Dielectric type=\"DIELECTRIC_CONSTANT\"><Property value=\"3.6\" refUnit=\"GHZ\" refValue=\"10\"/>"
                                "</Dielectric><Dielectric type=\"LOSS_TANGENT\"><Property value=\"0.004\"/></Dielectric></Spec>",
                                STACKUP("M", "0.3", "METAL", TWO_LAYERS("0.2")), NULL, &board), LSTUB_OK);
    LSTUB_INIT(layer);
    assert_ok(lstub_stackup_layer(lstub_board_stackup(board), 0, &layer, &err), err);
    assert_close(layer.dielectric->dk, 3.1, 1e-12, 0.0, BY_HAND);
    assert_close(layer.conductor->conductivity, 5.1e7, 1e-12, 0.0, BY_HAND);
    assert_ok(lstub_stackup_layer(lstub_board_stackup(board), 1, &layer, &err), err);
    assert_close(layer.dielectric->f_ref, 1e10, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "no frequency"), 2);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(layers_that_are_none)
{
    test_xml b = board_parts();
    b.layers = "<Layer name=\"TOP\" layerFunction=\"CONDUCTOR\" side=\"TOP\"/><Layer name=\"D1\" layerFunction=\"DIELCORE\"/>"
               "<Layer name=\"D1\" layerFunction=\"PLANE\"/><Layer name=\"THIN\" layerFunction=\"DIELPREG\"/>"
               "<Layer name=\"BOT\" layerFunction=\"CONDUCTOR\" side=\"BOTTOM\"/><Layer name=\"MASK\" layerFunction=\"SOLDERMASK\"/>"
               "<Layer name=\"PASTE\" layerFunction=\"SOLDERPASTE\"/><Layer name=\"DRILL\" layerFunction=\"DRILL\"/>";
    b.stackups = STACKUP("M", "0.5", "MASK", STACK_LAYER("PASTE", "0.1", "1", "E") STACK_LAYER("MASK", "0.02", "2", "NOWHERE")
                         STACK_LAYER("TOP", "0.05", "3", "C") STACK_LAYER("D1", "0.2", "4", "E") STACK_LAYER("THIN", "0", "5", "E")
                         STACK_LAYER("D1", "0.1", "6", "E") STACK_LAYER("GONE", "0.3", "7", "E") STACK_LAYER("BOT", "0.05", "8", "C")
                         STACK_LAYER("TOP", "0.05", "9", "C"));
    lstub_board *board = load(&b);
    ck_assert_int_eq(lstub_stackup_count(lstub_board_stackup(board)), 4);
    ck_assert_int_eq(layer_of(board, "D1 #2"), 2);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "Layer 'D1' comes twice|line "), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'PASTE' (SOLDERPASTE)"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'MASK'|Spec 'NOWHERE'"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "coating 'MASK'|left out"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'THIN'|no thickness"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'GONE'|not there"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'TOP'|twice"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "add up to 0.4 mm|0.5 mm"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(order_and_sides)
{
    lstub_board *board;
    lstub_layer  layer;
    LSTUB_INIT(layer);
    ck_assert_int_eq(load_stack(NULL, STACKUP("M", "0.3", "METAL", STACK_LAYER("BOT", "0.05", "30", "C") STACK_LAYER("TOP", "0.05", "4", "C")
                                STACK_LAYER("D1", "0.2", "20", "E")), NULL, &board), LSTUB_OK);
    ck_assert_int_eq(layer_of(board, "TOP"), 0);
    ck_assert_int_eq(layer_of(board, "BOT"), 2);
    lstub_board_destroy(board);
    ck_assert_int_eq(load_stack(NULL, STACKUP("M", "0.3", "METAL", STACK_LAYER("BOT", "0.05", "1", "C") STACK_LAYER("D1", "0.2", "2", "E")
                                STACK_LAYER("TOP", "0.05", "3", "C")), NULL, &board), LSTUB_OK);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "turned over"), 1);
    ck_assert_int_eq(layer_of(board, "TOP"), 0);
    lstub_board_destroy(board);
    ck_assert_int_eq(load_stack(NULL, STACKUP("M", "0.3", "METAL", STACK_LAYER("TOP", "0.05", "1", "C") STACK_LAYER("D1", "0.2", "1", "E")
                                STACK_LAYER("BOT", "0.05", "2", "C")), NULL, &board), LSTUB_OK);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'D1'|sequence 1 comes twice"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(stackups_refused)
{
    lstub_board *board;
    assert_refused(load_stack(NULL, "", NULL, &board), LSTUB_E_FORMAT, err, "no Stackup");
    assert_refused(load_stack(NULL, STACKUP("M", "1", "METAL", ""), NULL, &board), LSTUB_E_FORMAT, err, "line |'M'|0 layers");
    assert_refused(load_stack(NULL, STACKUP("M", "1", "METAL", STACK_LAYER("TOP", "0.05", "1", "C") STACK_LAYER("BOT", "0.05", "2", "C")), NULL,
                              &board), LSTUB_E_GEOMETRY, err, "line |'TOP'|'BOT'|without a dielectric");
    assert_refused(load_stack(NULL, STACKUP("M", "1", "METAL", STACK_LAYER("TOP", "0", "1", "C") STACK_LAYER("D1", "1", "2", "E")), NULL, &board),
                   LSTUB_E_ARGUMENT, err, "line |'TOP'|thickness = 0 m");
    assert_refused(load_stack(NULL, STACKUP("M", "1", "METAL", STACK_LAYER("TOP", "-0.1", "1", "C")), NULL, &board), LSTUB_E_FORMAT, err,
                   "line |'TOP'|thickness = -0.1");
}
END_TEST

/* ---- holes -------------------------------------------------------------------------------------- */

#define HOLE(name, net, x, y) \
    "<Set net=\"" net "\" geometry=\"VIA\"><Hole name=\"" name "\" diameter=\"{0.25}\" platingStatus=\"VIA\" x=\"{" x "}\" y=\"{" y "}\"/></Set>"
#define ON(layer, features) "<LayerFeature layerRef=\"" layer "\">" features "</LayerFeature>"
#define TRACE(net, x0, y0, x1, y1) \
    "<Set net=\"" net "\"><Features><Location x=\"0\" y=\"0\"/><Line startX=\"{" x0 "}\" startY=\"{" y0 "}\" endX=\"{" x1 "}\" endY=\"{" y1 "}\">" \
    "<LineDescRef id=\"L\"/></Line></Features></Set>"
#define PAD_OF(net, id, x, y, more) \
    "<Set net=\"" net "\"><Pad padstackDefRef=\"VIA\">" more "<Location x=\"{" x "}\" y=\"{" y "}\"/><StandardPrimitiveRef id=\"" id "\"/></Pad></Set>"
#define SPAN(name, from, to) "<Layer name=\"" name "\" layerFunction=\"DRILL\"><Span fromLayer=\"" from "\" toLayer=\"" to "\"/></Layer>"

START_TEST(spans)
{
    test_xml b = board_parts();
    char     layers[4096];
    snprintf(layers, sizeof layers, "%s%s", b.layers, SPAN("BLIND", "GND", "TOP") SPAN("BURIED", "GND", "SIG") SPAN("LOST", "TOP", "NOWHERE")
             "<Layer name=\"BARE\" layerFunction=\"DRILL\"/>");
    b.layers = layers;
    b.drills = ON("BLIND", HOLE("B1", "S", "1", "1")) ON("BURIED", HOLE("B2", "S", "2", "1")) ON("LOST", HOLE("B3", "S", "3", "1"))
               ON("BARE", HOLE("B4", "S", "4", "1")) ON("UNKNOWN", HOLE("B5", "S", "6", "1"));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "B1");
    ck_assert_int_eq(via.start_layer, 0);
    ck_assert_int_eq(via.end_layer, 2);
    via = via_of(board, "B2");
    ck_assert_int_eq(via.start_layer, 2);
    ck_assert_int_eq(via.end_layer, 4);
    for (int i = 3; i <= 5; i++) {
        char name[3] = {'B', (char)('0' + i), '\0'};
        via = via_of(board, name);
        ck_assert_int_eq(via.start_layer, 0);
        ck_assert_int_eq(via.end_layer, 6);
    }
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'LOST'|'NOWHERE'|through the board"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'BARE'|no Span|through the board"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'UNKNOWN'|not declared|through the board"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(holes_left_out)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("V2", "S", "5", "5")
                  "<Set><Hole name=\"N\" diameter=\"{3}\" platingStatus=\"NONPLATED\" x=\"{1}\" y=\"{1}\"/></Set>"
                  "<Set><Hole name=\"Q\" diameter=\"{3}\" x=\"{2}\" y=\"{1}\"/></Set>"
                  "<Set><Hole name=\"R\" platingStatus=\"VIA\" x=\"{3}\" y=\"{1}\"/></Set>"
                  "<Set><SlotCavity name=\"S1\" platingStatus=\"PLATED\"/></Set>")
               ON("SIG", HOLE("V3", "S", "7", "7"));
    lstub_board *board = load(&b);
    ck_assert_uint_eq(lstub_board_hole_count(board), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'V2'|(5, 5) mm|already"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'Q'|platingStatus or diameter"), 2);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'S1'|slot"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "1 Hole elements outside"), 1);
    lstub_board_destroy(board);
    b.drills = "";
    board = load(&b);
    ck_assert_uint_eq(lstub_board_hole_count(board), 0);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "no plated hole"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(vias_in_error)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("LONE", "T", "8", "8")
                  "<Set net=\"S\"><Hole name=\"WIDE\" diameter=\"{20}\" platingStatus=\"VIA\" x=\"{2}\" y=\"{5}\"/></Set>");
    lstub_board *board = load(&b);
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    ck_assert_int_eq(status_of(board, "LONE"), LSTUB_E_ARGUMENT);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'LONE'|'T'|nothing connects"), 1);
    ck_assert_int_eq(status_of(board, "WIDE"), LSTUB_E_ARGUMENT);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'WIDE'|drill = 0.02 m"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(steps)
{
    test_xml b = board_parts();
    b.after = "<Step name=\"PANEL\"><StepRepeat stepRef=\"B\" nx=\"2\" ny=\"1\"/>" ON("DRILL", HOLE("P1", "S", "5", "5") HOLE("P2", "S", "7", "5"))
              "</Step>";
    lstub_board *board = load(&b);
    assert_plain(board);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "more than one Step|'B'|2 holes"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "panel|'B'"), 1);
    lstub_board_destroy(board);
    b = board_parts();                      /* the step referred to has no holes: the one that has is read */
    b.drills = "";
    b.after = "<Step name=\"OTHER\">" ON("DRILL", HOLE("P1", "S", "5", "5")) "</Step>";
    board = load(&b);
    ck_assert_str_eq(lstub_board_name(board), "OTHER");
    ck_assert_uint_eq(lstub_board_hole_count(board), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- pad stacks --------------------------------------------------------------------------------- */

#define PADSTACK \
    "<PadStackDef name=\"VIA\"><PadstackHoleDef name=\"H\" diameter=\"{0.3}\" platingStatus=\"VIA\" x=\"0\" y=\"0\"/>" \
    "<PadstackPadDef layerRef=\"TOP\" padUse=\"REGULAR\"><Location x=\"0\" y=\"0\"/><Circle diameter=\"{0.6}\"/></PadstackPadDef>" \
    "<PadstackPadDef layerRef=\"GND\" padUse=\"ANTIPAD\"><Location x=\"0\" y=\"0\"/><StandardPrimitiveRef id=\"ANTI\"/></PadstackPadDef>" \
    "<PadstackPadDef layerRef=\"SIG\" padUse=\"REGULAR\"><Location x=\"0\" y=\"0\"/><StandardPrimitiveRef id=\"PAD\"/></PadstackPadDef></PadStackDef>"

/* No Hole elements at all: the pads' stacks say where the holes are. */
START_TEST(holes_from_pad_stacks)
{
    test_xml b = board_parts();
    b.step = PADSTACK;
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5") "<Set net=\"S\"><Pad padstackDefRef=\"VIA\"><Location x=\"{5}\" y=\"{5}\"/></Pad></Set>")
               ON("SIG", TRACE("S", "5", "5", "5", "9") "<Set net=\"S\"><Pad padstackDefRef=\"VIA\"><Location x=\"{5}\" y=\"{5}\"/></Pad></Set>");
    b.drills = "";
    lstub_board *board = load(&b);
    ck_assert_uint_eq(lstub_board_hole_count(board), 1);
    lstub_via via = via_of(board, "");
    ck_assert_str_eq(connects_of(board, &via), "TOP SIG");
    assert_close(via.drill, 0.3 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_start, 0.6 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_inner, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(antipad_on(board, &via, "GND"), 0.9 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "no Hole at (5, 5) mm|'VIA'"), 1);
    lstub_board_destroy(board);
    b.drills = board_parts().drills;        /* a Hole at the same place is the better source */
    board = load(&b);
    ck_assert_uint_eq(lstub_board_hole_count(board), 1);
    assert_close(via_of(board, "V1").drill, 0.25 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "no Hole at"), 0);
    lstub_board_destroy(board);
}
END_TEST

/* The hole leaves its diameter and plating to the pad stack, and has no pads in the features. */
START_TEST(hole_with_a_definition)
{
    test_xml b = board_parts();
    b.step = PADSTACK;
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5"));
    b.drills = ON("DRILL", "<Set net=\"S\" geometry=\"VIA\"><Hole name=\"V1\" x=\"{5}\" y=\"{5}\"/></Set>");
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    assert_close(via.drill, 0.3 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_start, 0.6 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(via.pad_end, 0.0, 0.0, 0.0, BY_HAND);
    ck_assert_int_eq(via.nonfunctional_pads, LSTUB_PADS_KEPT);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(pads)
{
    test_xml b = board_parts();
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5") PAD_OF("S", "PAD", "5", "5", ""))
               ON("GND", PAD_OF("S", "PAD", "5", "5", ""))
               ON("SIG", PAD_OF("S", "SMD", "5", "5", "<Xform rotation=\"30\"/>"))
               ON("BOT", PAD_OF("S", "GONE", "5", "5", ""));
    lstub_board *board = load_with(&b, "default antipad 1 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(via.nonfunctional_pads, LSTUB_PADS_KEPT);
    assert_close(on_layer(board, via.pads, via.pad_count, "GND", via.pad_inner), 0.5 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(on_layer(board, via.pads, via.pad_count, "SIG", via.pad_inner), sqrt(1.2 * 0.6 * 4.0 / 3.14159265358979) * MM, 1e-3, 0.0,
                 "disc of the same area");
    ck_assert(via.pad_end == 0.0);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "not round"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'GONE'|dictionary"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- planes ------------------------------------------------------------------------------------- */

#define RECTANGLE(x0, y0, x1, y1) \
    "<PolyBegin x=\"{" x0 "}\" y=\"{" y0 "}\"/><PolyStepSegment x=\"{" x1 "}\" y=\"{" y0 "}\"/><PolyStepSegment x=\"{" x1 "}\" y=\"{" y1 "}\"/>" \
    "<PolyStepSegment x=\"{" x0 "}\" y=\"{" y1 "}\"/><PolyStepSegment x=\"{" x0 "}\" y=\"{" y0 "}\"/>"
#define CIRCLE(x0, x1, x, y) \
    "<PolyBegin x=\"{" x1 "}\" y=\"{" y "}\"/><PolyStepCurve x=\"{" x1 "}\" y=\"{" y "}\" centerX=\"{" x "}\" centerY=\"{" y "}\" clockwise=\"false\"/>"
#define AREA(net, rings) "<Set net=\"" net "\"><Features><Location x=\"0\" y=\"0\"/><Contour>" rings "</Contour></Features></Set>"

static lstub_board *plane_board(test_xml *b, const char *ground, const char *rules)
{
    static char copper[8192];
    snprintf(copper, sizeof copper, "%s<LayerFeature layerRef=\"GND\">%s</LayerFeature>", ON("TOP", TRACE("S", "2", "5", "5", "5")), ground);
    b->copper = copper;
    return load_with(b, rules, NULL);
}

typedef struct plane_case {
    const char *ground;
    double      antipad;       /* mm; 0: no plane */
    int         connects;
    const char *words;         /* of a warning, or null */
} plane_case;

/* Antipad 0.8 of every kind, and what is none; all by hand. */
static const plane_case planes[] = {
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.6", "4.6", "5.4", "5.4") "</Cutout>"), 0.8, 0, NULL},
    /* the neighbour's cutout overlaps: it takes nothing away from this one */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout><Cutout>"
          CIRCLE("5.2", "6.0", "5.6", "5") "</Cutout>"), 0.8, 0, NULL},
    /* the opening is part of the outline, with a slit of no width to it */
    {AREA("G", "<Polygon><PolyBegin x=\"{0}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{5.4}\"/>"
          "<PolyStepSegment x=\"{5.4}\" y=\"{5.4}\"/><PolyStepSegment x=\"{5.4}\" y=\"{4.6}\"/><PolyStepSegment x=\"{4.6}\" y=\"{4.6}\"/>"
          "<PolyStepSegment x=\"{4.6}\" y=\"{5.4}\"/><PolyStepSegment x=\"{5.4}\" y=\"{5.4}\"/><PolyStepSegment x=\"{10}\" y=\"{5.4}\"/>"
          "<PolyStepSegment x=\"{10}\" y=\"{10}\"/><PolyStepSegment x=\"{0}\" y=\"{10}\"/><PolyStepSegment x=\"{0}\" y=\"{0}\"/></Polygon>"), 0.8, 0, NULL},
    /* no plane: beside its edge, in a wide opening, elsewhere */
    {AREA("G", "<Polygon>" RECTANGLE("5.6", "0", "10", "10") "</Polygon>"), 0.0, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("2", "2", "8", "8") "</Cutout>"), 0.0, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("20", "0", "30", "10") "</Polygon>"), 0.0, 0, NULL},
    /* its own net: covered; in an opening without spokes; in one with a spoke */
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), 0.0, 1, NULL},
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>")
     TRACE("S", "5.1", "5", "6", "5"), 0.0, 1, NULL},
    /* another net's copper right on the hole; a plane that is not there */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), 0.0, 0, "'V1'|'GND'|copper of another net covers it|no plane"},
    {"", 0.0, 0, "'V1'|'GND'|no copper areas|no plane"},
    /* two planes at different distances: the nearer copper counts */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4", "4", "6", "6") "</Cutout>")
     AREA("H", "<Polygon>" RECTANGLE("4.1", "4.1", "5.9", "5.9") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    /* drawn, not filled */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "<FillDesc fillProperty=\"HOLLOW\"/></Polygon>"), 0.0, 0, "no copper areas"},
    /* copper, then a clearance of negative polarity */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>")
     "<Set polarity=\"NEGATIVE\"><Features><Location x=\"{5}\" y=\"{5}\"/><Circle diameter=\"{0.8}\"/></Features></Set>", 0.8, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>")
     "<Set><Features><Location x=\"{5}\" y=\"{5}\"/><Contour><Polygon><PolyBegin x=\"{0.4}\" y=\"0\"/>"
     "<PolyStepCurve x=\"{0.4}\" y=\"0\" centerX=\"0\" centerY=\"0\" clockwise=\"true\"/><FillDesc fillProperty=\"VOID\"/></Polygon></Contour></Features></Set>",
     0.8, 0, NULL},
};

START_TEST(positive_planes)
{
    const plane_case *c = &planes[_i];
    test_xml     b = board_parts();
    lstub_board *board = plane_board(&b, c->ground, NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_msg(strcmp(connects_of(board, &via), c->connects ? "TOP GND" : "TOP") == 0, "plane %d: %s", _i, connects_of(board, &via));
    if (!c->connects)
        assert_close(antipad_on(board, &via, "GND"), c->antipad * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    if (c->words != NULL)
        ck_assert_msg(noticed(board, LSTUB_NOTICE_WARNING, c->words) == 1, "plane %d: no notice", _i);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(default_antipads)
{
    test_xml     b = board_parts();
    lstub_board *board = plane_board(&b, AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), "default antipad 0.7 mm");
    lstub_via    via = via_of(board, "V1");
    assert_close(antipad_on(board, &via, "GND"), 0.7 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'GND'|covers it|0.7 mm"), 1);
    lstub_board_destroy(board);
}
END_TEST

static void negative_ground(test_xml *b, char layers[4096])
{
    const char *at = strstr(b->layers, "<Layer name=\"D2\"");
    snprintf(layers, 4096, "<Layer name=\"TOP\" layerFunction=\"CONDUCTOR\" side=\"TOP\"/><Layer name=\"D1\" layerFunction=\"DIELPREG\"/>"
             "<Layer name=\"GND\" layerFunction=\"PLANE\" polarity=\"NEGATIVE\"/>%s", at);
    b->layers = layers;
    b->drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("V2", "G", "7", "5") HOLE("V3", "G", "9", "5"));
}

START_TEST(negative_planes)
{
    test_xml b = board_parts();
    char     layers[4096];
    negative_ground(&b, layers);
    lstub_board *board = plane_board(&b, PAD_OF("S", "ANTI", "5", "5", "") PAD_OF("G", "RELIEF", "7", "5", ""), NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP");
    assert_close(antipad_on(board, &via, "GND"), 0.9 * MM, 1e-12, 0.0, BY_HAND);
    via = via_of(board, "V2");              /* a thermal relief connects */
    ck_assert_str_eq(connects_of(board, &via), "GND");
    via = via_of(board, "V3");              /* so does no clearance at all, but that is said */
    ck_assert_str_eq(connects_of(board, &via), "GND");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'V3'|'GND'|no clearance"), 1);
    lstub_board_destroy(board);
    board = plane_board(&b, "", NULL);      /* nothing drawn: nothing is known */
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'GND'|negative layer|no plane"), 3);
    lstub_board_destroy(board);
    board = plane_board(&b, AREA("", "<Polygon>" RECTANGLE("0", "0", "8", "10") "</Polygon>") PAD_OF("G", "ANTI", "9", "5", ""), NULL);
    via = via_of(board, "V1");              /* in a wide area that is etched away */
    assert_close(antipad_on(board, &via, "GND"), 0.0, 0.0, 0.0, BY_HAND);
    via = via_of(board, "V3");
    assert_close(antipad_on(board, &via, "GND"), 0.9 * MM, 1e-12, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(conductor_layers_with_areas)
{
    test_xml b = board_parts();
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5"))
               ON("BOT", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"))
               ON("SIG", AREA("G", "<Polygon>" RECTANGLE("6", "0", "10", "10") "</Polygon>"));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(kind_of(board, "BOT"), LSTUB_LAYER_MIXED);
    ck_assert_int_eq(kind_of(board, "SIG"), LSTUB_LAYER_SIGNAL);
    assert_close(antipad_on(board, &via, "BOT"), 0.8 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "SIG"), 2.0 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "'BOT'|mixed layer"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- connections -------------------------------------------------------------------------------- */

typedef struct connect_case {
    const char *top;           /* features on TOP */
    int         connects;      /* V1 of net S at (5, 5), drill 0.25 */
} connect_case;

static const connect_case meetings[] = {
    {TRACE("S", "5", "5", "9", "5"), 1},
    {TRACE("S", "1", "5", "9", "5"), 1},                                          /* passes through */
    {TRACE("S", "1", "5.12", "9", "5.12"), 1},                                    /* touches the barrel */
    {TRACE("S", "1", "5.18", "9", "5.18"), 0},                                    /* 0.13 off its edge: passes by */
    {TRACE("S", "1", "5.18", "9", "5.18") PAD_OF("S", "PAD", "5", "5", ""), 1},   /* but over the pad */
    {PAD_OF("S", "PAD", "5", "5", ""), 0},                                        /* a pad alone leads nowhere */
    {TRACE("T", "1", "5", "9", "5"), 0},                                          /* another net */
    {TRACE("", "1", "5", "9", "5"), 0},                                           /* no net */
    {PAD_OF("S", "SMD", "5.4", "5", "") , 1},                                     /* a land that covers the axis */
    {PAD_OF("S", "SMD", "5.8", "5", ""), 0},
    {PAD_OF("S", "SMD", "5", "5.5", "<Xform rotation=\"90\"/>"), 1},              /* turned over the axis */
    {PAD_OF("S", "SMD", "5", "5.5", ""), 0},
    {"<Set net=\"S\"><Pad><Location x=\"{5.7}\" y=\"{5}\"/><StandardPrimitiveRef id=\"SMD\"/><PinRef pin=\"1\" componentRef=\"U1\"/></Pad></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"{3}\" y=\"{4}\"/><Polyline><PolyBegin x=\"{0}\" y=\"{0}\"/><PolyStepSegment x=\"{2}\" y=\"{1}\"/>"
     "<LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},                   /* moved by its Location */
    {"<Set net=\"S\"><Features><Xform rotation=\"90\"/><Location x=\"{5}\" y=\"{3}\"/><Polyline><PolyBegin x=\"{0}\" y=\"{0}\"/>"
     "<PolyStepSegment x=\"{2}\" y=\"{0}\"/><LineDesc lineEnd=\"ROUND\" lineWidth=\"{0.1}\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"false\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"true\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 0},
    {"<Set net=\"S\"><Features><Xform mirror=\"true\"/><Location x=\"{8}\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"true\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Arc startX=\"{4}\" startY=\"{4}\" endX=\"{4}\" endY=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" "
     "clockwise=\"false\"><LineDescRef id=\"L\"/></Arc></Features></Set>", 1},
    {AREA("S", "<Polygon>" RECTANGLE("4.9", "4.9", "6", "6") "</Polygon>"), 1},
    {AREA("S", "<Polygon>" RECTANGLE("5.1", "5.1", "6", "6") "</Polygon>"), 0},   /* 0.1414 from the axis, drill radius 0.125 */
};

START_TEST(what_connects)
{
    const connect_case *c = &meetings[_i];
    test_xml b = board_parts();
    char     copper[4096];
    snprintf(copper, sizeof copper, "<LayerFeature layerRef=\"TOP\">%s</LayerFeature>%s", c->top, ON("SIG", TRACE("S", "5", "5", "5", "9")));
    b.copper = copper;
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    ck_assert_msg(strcmp(connects_of(board, &via), c->connects ? "TOP SIG" : "SIG") == 0, "meeting %d: %s", _i, connects_of(board, &via));
    lstub_board_destroy(board);
}
END_TEST

#define PIN(layer, more) ON(layer, "<Set net=\"S\"><Pad padstackDefRef=\"VIA\">" more "<Location x=\"{5}\" y=\"{5}\"/>" \
    "<StandardPrimitiveRef id=\"PAD\"/><PinRef pin=\"1\" componentRef=\"J1\"/></Pad></Set>")

/* A through-hole pin has pads on all layers, but leads away on the side of its component. */
START_TEST(pins)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", "<Set net=\"S\" geometry=\"PRESS\"><Hole name=\"V1\" diameter=\"{0.25}\" platingStatus=\"PLATED\" x=\"{5}\" y=\"{5}\"/></Set>");
    b.copper = PIN("TOP", "") PIN("SIG", "") ON("SIG", TRACE("S", "5", "5", "5", "9")) PIN("BOT", "");
    lstub_board *board = load_with(&b, "pin PRESS* length 0.6 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP SIG");
    assert_close(via.pad_end, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(via.pin_side, LSTUB_SIDE_TOP);
    assert_close(via.pin_length, 0.6 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'V1'|on which side"), 1);
    lstub_board_destroy(board);
    b.step = "<Component refDes=\"J1\" layerRef=\"BOT\"/>";
    board = load_with(&b, "pin PRESS* length 0.6 mm", NULL);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    ck_assert_int_eq(via.pin_side, LSTUB_SIDE_BOTTOM);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "on which side"), 0);
    lstub_board_destroy(board);
    b.step = "";
    b.copper = PIN("TOP", "") ON("SIG", TRACE("S", "5", "5", "5", "9")) PIN("BOT", "<Xform mirror=\"true\"/>");
    board = load(&b);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    lstub_board_destroy(board);
    b = board_parts();                      /* a land in one outer layer only: the via is in the pad */
    b.copper = PIN("BOT", "") ON("SIG", TRACE("S", "5", "5", "5", "9"));
    board = load(&b);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    lstub_board_destroy(board);
}
END_TEST

START_TEST(vias_on_vias)
{
    test_xml b = board_parts();
    char     layers[4096];
    snprintf(layers, sizeof layers, "%s%s", b.layers, SPAN("D12", "TOP", "GND") SPAN("D23", "GND", "SIG"));
    b.layers = layers;
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5")) ON("SIG", TRACE("S", "5.2", "5", "5", "9"))
               ON("GND", PAD_OF("S", "PAD", "5", "5", ""));
    b.drills = ON("D12", HOLE("U1", "S", "5", "5")) ON("D23", HOLE("U2", "S", "5.2", "5")) ON("DRILL", HOLE("T", "T", "5", "5.6"));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "U1");
    ck_assert_str_eq(connects_of(board, &via), "TOP GND");
    via = via_of(board, "U2");
    ck_assert_str_eq(connects_of(board, &via), "GND SIG");
    /* another net's barrel in the way: 0.6 between the axes, its radius 0.125 */
    via = via_of(board, "U1");
    assert_close(clear_on(board, &via, "TOP"), 2.0 * (0.6 - 0.125) * MM, 1e-12, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(room_for_a_bit)
{
    test_xml b = board_parts();
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5")) ON("SIG", TRACE("T", "1", "5.5", "9", "5.5"))
               ON("BOT", PAD_OF("T", "SMD", "6", "5", "") PAD_OF("T", "PAD", "5", "4.2", ""));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    assert_close(clear_on(board, &via, "SIG"), 2.0 * 0.45 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "BOT"), 2.0 * 0.4 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "TOP"), -1.0, 0.0, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

/* ---- neighbours --------------------------------------------------------------------------------- */

START_TEST(returns)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("G1", "GND", "6", "5") HOLE("G2", "GND", "5", "3") HOLE("G3", "GND", "9", "5")
                  HOLE("P1", "PWR", "5.5", "5"));
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5") TRACE("GND", "5", "3", "9", "3"));
    lstub_board *board = load_with(&b, "returns GND within 2.5 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_VIAS);
    ck_assert_int_eq(via.return_count, 2);
    assert_close(via.return_distance, sqrt(2.0) * MM, 0.0, 1e-7, "geometric mean of 1 and 2 mm");
    assert_close(via.return_drill, 0.25 * MM, 1e-12, 0.0, BY_HAND);
    via = via_of(board, "G2");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_NONE);
    lstub_board_destroy(board);
    board = load_with(&b, "returns GND within 0.9 mm", NULL);
    via = via_of(board, "V1");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_NONE);
    lstub_board_destroy(board);
}
END_TEST

/* More return vias than have room on one circle: as many of the nearest as do. */
START_TEST(crowded_returns)
{
    test_xml b = board_parts();
    char     drills[16384], one[256];
    snprintf(drills, sizeof drills, "<LayerFeature layerRef=\"DRILL\">%s", HOLE("V1", "S", "5", "5"));
    for (int i = 0; i < 40; i++) {
        snprintf(one, sizeof one, "<Set net=\"GND\"><Hole name=\"G%d\" diameter=\"{0.25}\" platingStatus=\"VIA\" x=\"{%.6f}\" y=\"{%.6f}\"/></Set>", i,
                 5.0 + (0.5 + 0.02 * i) * cos(i * 2.4), 5.0 + (0.5 + 0.02 * i) * sin(i * 2.4));
        strcat(drills, one);
    }
    strcat(drills, "</LayerFeature>");
    b.drills = drills;
    lstub_board *board = load_with(&b, "returns GND within 2 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    ck_assert_int_gt(via.return_count, 4);
    ck_assert_int_lt(via.return_count, 40);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "'V1'|40 return vias"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(pairs)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("P", "X_P", "5", "5") HOLE("N", "X_N", "5.7", "5") HOLE("N2", "X_N", "9", "5") HOLE("L", "Y_P", "1", "1"));
    b.copper = ON("TOP", TRACE("X_P", "2", "5", "5", "5") TRACE("X_N", "5.7", "5", "9", "5") TRACE("Y_P", "1", "1", "2", "1"))
               ON("GND", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.7", "4.7", "6", "5.3") "</Cutout>"
                  "<Cutout>" CIRCLE("0.6", "1.4", "1", "1") "</Cutout><Cutout>" CIRCLE("8.6", "9.4", "9", "5") "</Cutout>"));
    lstub_board *board = load_with(&b, "pair _P _N", NULL);
    lstub_via    via = via_of(board, "P");
    lstub_hole   hole;
    LSTUB_INIT(hole);
    assert_ok(lstub_board_hole(board, 0, &hole, &err), err);
    ck_assert_int_eq(hole.partner, 1);
    assert_ok(lstub_board_hole(board, 1, &hole, &err), err);
    ck_assert_int_eq(hole.partner, 0);
    assert_ok(lstub_board_hole(board, 2, &hole, &err), err);
    ck_assert_int_eq(hole.partner, -1);
    ck_assert_int_eq(via.pair_kind, LSTUB_PAIR_SHARED);            /* one opening holds both */
    assert_close(via.pair_pitch, 0.7 * MM, 0.0, 1e-9, BY_HAND);
    ck_assert_int_eq(via_of(board, "L").pair_kind, LSTUB_PAIR_NONE);
    lstub_board_destroy(board);
    board = load_with(&b, "pair _P _N separate", NULL);
    ck_assert_int_eq(via_of(board, "P").pair_kind, LSTUB_PAIR_SEPARATE);
    lstub_board_destroy(board);
    b.copper = ON("TOP", TRACE("X_P", "2", "5", "5", "5") TRACE("X_N", "5.7", "5", "9", "5"))
               ON("GND", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.7", "4.7", "5.3", "5.3") "</Cutout>"
                  "<Cutout>" RECTANGLE("5.4", "4.7", "6", "5.3") "</Cutout>"));
    board = load_with(&b, "pair _P _N", NULL);
    ck_assert_int_eq(via_of(board, "P").pair_kind, LSTUB_PAIR_SEPARATE);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(signals)
{
    test_xml     b = board_parts();
    lstub_board *board = load_with(&b, "signal FAST symbol_rate 10 GBd levels 2 notch_over_nyquist 2\nsignal SLOW symbol_rate 1 GBd levels 2 "
                                   "notch_over_nyquist 2\nnet S SLOW", NULL);
    lstub_hole   hole;
    LSTUB_INIT(hole);
    assert_ok(lstub_board_hole(board, 0, &hole, &err), err);
    ck_assert_int_eq(hole.signal, 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- back-drills -------------------------------------------------------------------------------- */

#define BACKDRILL(type, property) "<Backdrill type=\"" type "\"><Property " property "/></Backdrill>"
#define OTHER_DRILL(comment, property) "<Backdrill type=\"OTHER\" comment=\"" comment "\"><Property " property "/></Backdrill>"

static lstub_board *drilled(test_xml *b, const char *spec, const char *extra)
{
    static char specs[4096], drills[4096];
    snprintf(specs, sizeof specs, "%s%s", board_parts().specs, spec);
    snprintf(drills, sizeof drills, "<LayerFeature layerRef=\"DRILL\"><Set net=\"S\" geometry=\"VIA\"><SpecRef id=\"BD\"/>"
             "<Hole name=\"V1\" diameter=\"{0.25}\" platingStatus=\"VIA\" x=\"{5}\" y=\"{5}\"/></Set>%s</LayerFeature>", extra);
    b->specs = specs;
    b->drills = drills;
    return load(b);
}

START_TEST(backdrills)
{
    test_xml b = board_parts();
    lstub_board *board = drilled(&b, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"BOT\"")
                                 BACKDRILL("MUST_NOT_CUT_LAYER", "text=\"SIG\"") BACKDRILL("MAX_STUB_LENGTH", "value=\"100\" unit=\"MICRON\"") "</Spec>", "");
    lstub_via via = via_of(board, "V1");
    ck_assert_uint_eq(via.backdrill_count, 1);
    ck_assert_int_eq(via.backdrills[0].side, LSTUB_SIDE_BOTTOM);
    assert_close(via.backdrills[0].depth, 0.35 * MM, 1e-9, 0.0, "0.45 to SIG less 0.1");
    assert_close(via.backdrills[0].diameter, 0.25 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'BD'|bit diameter"), 1);
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    lstub_board_destroy(board);
    board = drilled(&b, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"BOT\"")
                    BACKDRILL("MUST_NOT_CUT_LAYER", "layerOrGroupRef=\"SIG\"") OTHER_DRILL("TARGET_DEPTH", "value=\"0.3\" unit=\"MM\"")
                    OTHER_DRILL("BIT_DIAMETER", "value=\"450\" unit=\"MICRON\"") "</Spec>", "");
    via = via_of(board, "V1");
    ck_assert_uint_eq(via.backdrill_count, 1);
    assert_close(via.backdrills[0].depth, 0.3 * MM, 1e-9, 0.0, BY_HAND);
    assert_close(via.backdrills[0].diameter, 0.45 * MM, 1e-9, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(backdrills_refused)
{
    test_xml b = board_parts();
    lstub_board *board = drilled(&b, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"SIG\"") "</Spec>", "");
    ck_assert_uint_eq(via_of(board, "V1").backdrill_count, 0);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'V1'|'BD'|outer copper"), 1);
    lstub_board_destroy(board);
    board = drilled(&b, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"BOT\"") "</Spec>", "");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'BD'|no depth"), 1);
    lstub_board_destroy(board);
    board = drilled(&b, "", "");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'V1'|Spec 'BD'|not there"), 1);
    lstub_board_destroy(board);
    board = drilled(&b, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"BOT\"")
                    OTHER_DRILL("TARGET_DEPTH", "value=\"0.6\" unit=\"MM\"") "</Spec>", "");
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_E_GEOMETRY);     /* through the layer that the signal leaves on */
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "'V1'|no via|cuts layer"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* A bare hole of a larger bit on the plated one carries the specification. */
START_TEST(backdrills_as_bare_holes)
{
    test_xml b = board_parts();
    char     specs[4096];
    snprintf(specs, sizeof specs, "%s%s", b.specs, "<Spec name=\"BD\">" BACKDRILL("START_LAYER", "layerOrGroupRef=\"BOT\"")
             BACKDRILL("MUST_NOT_CUT_LAYER", "layerOrGroupRef=\"SIG\"") BACKDRILL("MAX_STUB_LENGTH", "value=\"0.2\" unit=\"MM\"") "</Spec>");
    b.specs = specs;
    b.drills = ON("DRILL", HOLE("V1", "S", "5", "5") "<Set><SpecRef id=\"BD\"/><Hole name=\"B\" diameter=\"{0.5}\" platingStatus=\"NONPLATED\" "
                  "x=\"{5}\" y=\"{5}\"/></Set><Set><SpecRef id=\"BD\"/><Hole name=\"B\" diameter=\"{0.5}\" platingStatus=\"NONPLATED\" x=\"{8}\" y=\"{5}\"/></Set>");
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    ck_assert_uint_eq(via.backdrill_count, 1);
    assert_close(via.backdrills[0].depth, 0.25 * MM, 1e-9, 0.0, BY_HAND);
    assert_close(via.backdrills[0].diameter, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "on no plated hole"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- shared boards ------------------------------------------------------------------------------ */

static lstub_board *load_shared(const char *name)
{
    const char  *folder = getenv("LSTUB_SHARED");
    char         path[1024];
    lstub_board *board = NULL;
    if (folder == NULL)
        return NULL;
    snprintf(path, sizeof path, "%s/boards/%s.xml.gz", folder, name);
    LSTUB_INIT(err);
    assert_ok(lstub_board_load(path, NULL, NULL, NULL, &board, &err), err);
    return board;
}

/* Length of the bottom stub of a trace on `layer` entered from TOP, in mil. */
static double stub_below(const lstub_board *board, const char *layer)
{
    int32_t    layers[2] = {layer_of(board, "TOP"), layer_of(board, layer)}, n = 0;
    lstub_stub stubs[2];
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    for (size_t i = 0; i < lstub_board_hole_count(board); i++) {
        lstub_via via;
        LSTUB_INIT(via);
        assert_ok(lstub_board_via(board, i, &via, &err), err);
        if (via.connect_count != 2 || via.connects[0] != layers[0] || via.connects[1] != layers[1])
            continue;
        assert_ok(lstub_via_stubs(lstub_board_stackup(board), &via, stubs, sizeof stubs[0], &n, &err), err);
        ck_assert_int_eq(n, 1);
        return stubs[0].length / MIL;
    }
    return -1.0;
}

START_TEST(shared_testcase10)
{
    lstub_board *board = load_shared("testcase10");
    if (board == NULL) {
        printf("skipped: testcase10 needs LSTUB_SHARED, the folder with boards/\n");
        return;
    }
    size_t vias = 0;
    ck_assert_uint_eq(lstub_board_hole_count(board), 1859);
    ck_assert_int_eq(lstub_stackup_copper_count(lstub_board_stackup(board)), 18);
    ck_assert_int_eq(lstub_stackup_count(lstub_board_stackup(board)), 37);
    assert_close(stub_below(board, "INT1"), 61.3, 0.0, 1e-6, "README of the boards: a trace on INT1 entered from TOP");
    assert_close(stub_below(board, "INT8"), 13.0, 0.0, 1e-6, "the stackup of the file: BOTTOM less INT8");
    for (size_t i = 0; i < lstub_board_hole_count(board); i++) {
        lstub_via  via;
        lstub_hole hole;
        LSTUB_INIT(via);
        LSTUB_INIT(hole);
        assert_ok(lstub_board_via(board, i, &via, &err), err);
        assert_ok(lstub_board_hole(board, i, &hole, &err), err);
        if (strcmp(hole.padstack, "BGA_VIA") != 0)
            continue;
        vias++;
        assert_close(via.drill, 10 * MIL, 1e-12, 0.0, BY_HAND);
        assert_close(via.pad_start, 19 * MIL, 1e-12, 0.0, "CIRCLE_1 of the file");
        for (int32_t k = 0; k < 2; k++)        /* GND1 is a negative plane: CIRCLE_2, or FULL_CONTACT */
            if (antipad_on(board, &via, k ? "GND5" : "GND1") > 0.0 && strcmp(hole.net, "GND") != 0)
                assert_close(antipad_on(board, &via, k ? "GND5" : "GND1"), 25 * MIL, 1e-12, 0.0, "CIRCLE_2 of the file");
    }
    ck_assert_uint_eq(vias, 1753);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "overallThickness of 1.9431 mm|over all layers"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(shared_others)
{
    lstub_board *board = load_shared("testcase3");
    if (board == NULL) {
        printf("skipped: testcase3 and 9 need LSTUB_SHARED, the folder with boards/\n");
        return;
    }
    ck_assert_uint_eq(lstub_board_hole_count(board), 171);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "add up to 1.1684 mm|overallThickness of 1.1938 mm"), 1);   /* 46 and 47 mil */
    ck_assert_int_eq(kind_of(board, "GND"), LSTUB_LAYER_PLANE);
    lstub_board_destroy(board);
    board = load_shared("testcase9");
    lstub_interval outer;
    LSTUB_INIT(outer);
    ck_assert_uint_eq(lstub_board_hole_count(board), 157);
    ck_assert_int_eq(lstub_stackup_copper_count(lstub_board_stackup(board)), 6);
    assert_ok(lstub_stackup_interval(lstub_board_stackup(board), 0.0, 35.6e-6, &outer, &err), err);
    assert_close(outer.tol_plus, 2.5e-6, 1e-9, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "SOLDERPASTE"), 2);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "overallThickness of 1.7166 mm|those left out"), 1);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_REFUSED, "slot"), 4);
    lstub_board_destroy(board);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("ipc2581 reader");
    TCase *tests = tcase_create("reader");
    tcase_set_timeout(tests, 60);
    tcase_add_test(tests, units_of_length);
    tcase_add_test(tests, plain_notices);
    tcase_add_test(tests, other_namespaces_and_encodings);
    tcase_add_test(tests, several_stackups);
    tcase_add_test(tests, missing_dk);
    tcase_add_test(tests, values_out_of_range);
    tcase_add_test(tests, resin_and_conductivity);
    tcase_add_test(tests, layers_that_are_none);
    tcase_add_test(tests, order_and_sides);
    tcase_add_test(tests, stackups_refused);
    tcase_add_test(tests, spans);
    tcase_add_test(tests, holes_left_out);
    tcase_add_test(tests, vias_in_error);
    tcase_add_test(tests, steps);
    tcase_add_test(tests, holes_from_pad_stacks);
    tcase_add_test(tests, hole_with_a_definition);
    tcase_add_test(tests, pads);
    tcase_add_loop_test(tests, positive_planes, 0, (int)COUNT(planes));
    tcase_add_test(tests, default_antipads);
    tcase_add_test(tests, negative_planes);
    tcase_add_test(tests, conductor_layers_with_areas);
    tcase_add_loop_test(tests, what_connects, 0, (int)COUNT(meetings));
    tcase_add_test(tests, pins);
    tcase_add_test(tests, vias_on_vias);
    tcase_add_test(tests, room_for_a_bit);
    tcase_add_test(tests, returns);
    tcase_add_test(tests, crowded_returns);
    tcase_add_test(tests, pairs);
    tcase_add_test(tests, signals);
    tcase_add_test(tests, backdrills);
    tcase_add_test(tests, backdrills_refused);
    tcase_add_test(tests, backdrills_as_bare_holes);
    tcase_add_test(tests, shared_testcase10);
    tcase_add_test(tests, shared_others);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
