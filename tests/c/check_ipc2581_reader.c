/* The reader of boards: what becomes of each thing a board file can say. */
#define BOARD_FILE "check_reader.xml"
#include "check_ipc2581.h"

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
    assert_refused(load_stack(NULL, STACKUP("M", "1", "METAL", STACK_LAYER("TOP", "-0.1", "1", "C")), NULL, &board), LSTUB_E_FORMAT, err,
                   "line |'TOP'|thickness = -0.1");
}
END_TEST

/* ---- holes -------------------------------------------------------------------------------------- */

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
    tcase_add_test(tests, backdrills);
    tcase_add_test(tests, backdrills_refused);
    tcase_add_test(tests, backdrills_as_bare_holes);
    tcase_add_test(tests, shared_testcase10);
    tcase_add_test(tests, shared_others);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
