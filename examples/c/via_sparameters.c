/*
** A via as a network: as it is, drilled back, and without its stub; what the stub costs is the difference.
**
**     via_sparameters BOARD.xml[.gz] OUTDIR
**
** On the stackup of the demo board, examples/data/demo_board.xml.gz: from a microstrip on TOP to a stripline on IN3. Prints
** a table and writes a .s2p of each and a pair's .s4p into OUTDIR. Board, via and link are invented.
*/
#include <libstub_ipc2581.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { POINTS = 1340, TIMES = 301, PORTS_MOST = 4 };
#define RISE_TIME 15e-12           /* of the step, 20 to 80 percent */

/* Return vias around a pair with its first barrel at (0, 0) and its partner at (1, 0) mm: x, y, m. */
static const double around_pair[] = {-1e-3, 0.0, 0.0, -1e-3, 0.0, 1e-3, 1e-3, -1e-3, 1e-3, 1e-3, 2e-3, 0.0};
static double F[POINTS], T[TIMES];

static void must(int32_t status, const lstub_error *err)
{
    if (status < 0) {
        fprintf(stderr, "via_sparameters: %s (%s)\n", err->message, lstub_status_name(status));
        exit(1);
    }
}

static double db(const double *z)
{
    return 20.0 * log10(hypot(z[0], z[1]));
}

/* The cross-section of a trace on a layer of the stackup, which must outlive it. The thin solder mask on a microstrip is
** left out. */
static lstub_trace make_trace(const lstub_stackup *board, const char *name, int32_t kind, double width)
{
    lstub_trace trace;
    lstub_layer above, layer, below;
    lstub_error err;
    int32_t i;
    LSTUB_INIT(err);
    LSTUB_INIT(trace);
    LSTUB_INIT(above);
    LSTUB_INIT(layer);
    LSTUB_INIT(below);
    must(lstub_stackup_find(board, name, &i, &err), &err);
    must(lstub_stackup_layer(board, i - 1, &above, &err), &err);
    must(lstub_stackup_layer(board, i, &layer, &err), &err);
    must(lstub_stackup_layer(board, i + 1, &below, &err), &err);
    trace.kind = kind;
    trace.width = width;
    trace.thickness = layer.thickness;
    trace.conductor = layer.conductor;
    trace.height_below = below.thickness;
    trace.dielectric_below = below.dielectric;
    if (kind == LSTUB_TRACE_STRIPLINE) {
        trace.height_above = above.thickness;
        trace.dielectric_above = above.dielectric;
    }
    return trace;
}

static lstub_port make_port(int32_t layer, const lstub_trace *trace)
{
    lstub_port port;
    LSTUB_INIT(port);
    port.layer = layer;
    port.trace = trace;
    port.distance = 5e-3;
    return port;
}

static lstub_signal make_link(void)
{
    lstub_signal link;
    LSTUB_INIT(link);
    link.symbol_rate = 32e9;
    link.levels = 2;
    return link;
}

/* The drill as planned, and as shallow as the tolerances allow: the longest stub that may be left. */
static lstub_backdrill plan_drill(const lstub_stackup *board, const lstub_via *via, double *residual)
{
    lstub_criteria criteria;
    lstub_capability fabricator;
    lstub_decision decision;
    lstub_job job;
    lstub_plan *plan = NULL;
    lstub_error err;
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, 0.0, 0.0};
    const lstub_signal link = make_link();
    LSTUB_INIT(err);
    LSTUB_INIT(criteria);
    LSTUB_INIT(fabricator);
    LSTUB_INIT(decision);
    LSTUB_INIT(job);
    criteria.notch_over_nyquist = 2.0;
    criteria.added_loss_db = 0.5;
    fabricator.depth_tolerance = fabricator.cut_clearance = fabricator.residual_min = 50e-6;
    fabricator.residual_target = 150e-6;
    fabricator.bit_oversize = 0.2e-3;
    job.via = via;
    job.signal = &link;
    job.criteria = &criteria;
    must(lstub_plan_create(board, &job, 1, sizeof job, &fabricator, NULL, NULL, &plan, &err), &err);
    must(lstub_plan_decision(plan, 0, &decision, &err), &err);
    lstub_plan_destroy(plan);
    drill.depth = decision.bottom.depth - (decision.bottom.residual_most - decision.bottom.residual);
    drill.diameter = decision.bottom.diameter;
    *residual = decision.bottom.residual_most;
    return drill;
}

static lstub_transition *make_transition(const lstub_stackup *board, const lstub_via *via, const lstub_port ports[2],
                                         int32_t stubs)
{
    lstub_transition *transition = NULL;
    lstub_transition_options options;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    options.stubs = stubs;
    must(lstub_transition_create(board, via, ports, 2, sizeof ports[0], &options, NULL, &transition, &err), &err);
    return transition;
}

/* A row of the table: at Nyquist, up to Nyquist, and to an edge. */
static void show(const char *name, const lstub_transition *via, const lstub_transition *without, double stub)
{
    static double s[8 * POINTS], loss[POINTS], z[TIMES];
    double at[8], bare[8], nyquist, least, most;
    char first[16] = "none";
    lstub_loss_fit fit;
    lstub_loss_deviation ripple;
    lstub_notch notch;
    lstub_error err;
    size_t count = 0;
    const lstub_signal link = make_link();
    LSTUB_INIT(err);
    LSTUB_INIT(fit);
    LSTUB_INIT(ripple);
    LSTUB_INIT(notch);
    must(lstub_signal_nyquist(&link, &nyquist, &err), &err);
    must(lstub_transition_s(via, F, POINTS, s, NULL, &err), &err);
    must(lstub_transition_s(via, &nyquist, 1, at, NULL, &err), &err);
    must(lstub_transition_s(without, &nyquist, 1, bare, NULL, &err), &err);
    for (int k = 0; k < POINTS; k++)
        loss[k] = -db(s + 8 * k + 4);             /* row 2, column 1 */
    fit.f_high = nyquist;
    must(lstub_insertion_loss_deviation(F, loss, POINTS, &fit, NULL, &ripple, &err), &err);
    must(lstub_tdr(F, s, POINTS, 2, 0, 50.0, RISE_TIME, T, TIMES, z, &err), &err);
    least = most = z[0];
    for (int k = 1; k < TIMES; k++) {
        least = z[k] < least ? z[k] : least;
        most = z[k] > most ? z[k] : most;
    }
    must(lstub_transition_notches(via, LSTUB_MODE_SINGLE, 1, 0, 67e9, &notch, 1, sizeof notch, &count, &err), &err);
    if (count > 0)
        snprintf(first, sizeof first, "%.2f", notch.f / 1e9);
    printf("%-18s%8.3f%9.2f%9.2f%9.2f%9.2f%9.3f%9s%9.1f%7.1f\n", name, stub * 1e3, -db(at + 4), db(bare + 4) - db(at + 4),
           ripple.rms, db(at), hypot(at[0] - bare[0], at[1] - bare[1]), first, least, most);
}

static void save(const char *folder, const char *name, const lstub_transition *via)
{
    static double s[2 * PORTS_MOST * PORTS_MOST * POINTS];
    double reference[PORTS_MOST];
    char first[64], second[64], file[64];
    const char *const comments[] = {first, second};
    lstub_touchstone_data data;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(data);
    data.ports = lstub_transition_ports(via);
    for (int32_t i = 0; i < data.ports; i++)
        must(lstub_transition_reference(via, i, &reference[i], &err), &err);
    must(lstub_transition_s(via, F, POINTS, s, NULL, &err), &err);
    snprintf(first, sizeof first, " %s, invented: an estimate from a model", name);
    snprintf(second, sizeof second, " ports: 1 TOP, 2 IN3%s", data.ports == 2 ? "" : "; of the partner 3 TOP, 4 IN3");
    data.unit = LSTUB_UNIT_GHZ;
    data.digits = 9;
    data.points = POINTS;
    data.freq = F;
    data.data = s;
    data.reference = reference;
    data.comments = comments;
    data.comment_count = 2;
    snprintf(file, sizeof file, "%s.s%dp", name, (int)data.ports);
    const size_t bytes = strlen(folder) + sizeof file + 1;
    char *path = malloc(bytes);
    if (path == NULL) {
        fprintf(stderr, "via_sparameters: out of memory\n");
        exit(1);
    }
    snprintf(path, bytes, "%s/%s", folder, file);
    must(lstub_touchstone_save(&data, path, &err), &err);
    free(path);
    printf("written: %s\n", file);
}

int main(int argc, char **argv)
{
    lstub_board *file = NULL;
    lstub_stackup *board = NULL;
    lstub_error err;
    int32_t connects[2];
    double residual;
    LSTUB_INIT(err);
    if (argc != 3) {
        fprintf(stderr, "usage: via_sparameters BOARD.xml[.gz] OUTDIR\n");
        return 1;
    }
    for (int k = 0; k < POINTS; k++)
        F[k] = (k + 1) * 50e6;                    /* to 67 GHz: 1/RISE_TIME and more */
    for (int k = 0; k < TIMES; k++)
        T[k] = (k - 50) * 1e-12;

    must(lstub_board_load(argv[1], NULL, NULL, NULL, &file, &err), &err);
    /* woven glass; the file cannot say it */
    must(lstub_stackup_with_in_plane_ratio(lstub_board_stackup(file), 1.15, NULL, &board, &err), &err);
    must(lstub_stackup_find(board, "TOP", &connects[0], &err), &err);
    must(lstub_stackup_find(board, "IN3", &connects[1], &err), &err);
    const lstub_trace microstrip = make_trace(board, "TOP", LSTUB_TRACE_MICROSTRIP, 0.24e-3);
    const lstub_trace stripline = make_trace(board, "IN3", LSTUB_TRACE_STRIPLINE, 0.10e-3);
    const lstub_port ports[2] = {make_port(connects[0], &microstrip), make_port(connects[1], &stripline)};

    lstub_via via;
    LSTUB_INIT(via);
    via.drill = 0.25e-3;
    via.pad_start = via.pad_inner = via.pad_end = 0.50e-3;
    via.antipad = 0.75e-3;
    via.return_kind = LSTUB_RETURN_VIAS;
    via.return_count = 4;
    via.return_distance = 1.0e-3;
    via.connects = connects;
    via.connect_count = 2;

    const lstub_backdrill drill = plan_drill(board, &via, &residual);
    lstub_via drilled = via;
    drilled.backdrills = &drill;
    drilled.backdrill_count = 1;

    lstub_via pair = drilled;
    pair.pair_kind = LSTUB_PAIR_SEPARATE;
    pair.pair_pitch = 1.0e-3;
    pair.return_xy = around_pair;
    pair.return_count = 6;

    lstub_stub stub;
    int32_t stubs;
    LSTUB_INIT(stub);
    must(lstub_via_stubs(board, &via, &stub, sizeof stub, &stubs, &err), &err);
    lstub_transition *as_it_is = make_transition(board, &via, ports, LSTUB_STUBS_KEPT);
    lstub_transition *drilled_back = make_transition(board, &drilled, ports, LSTUB_STUBS_KEPT);
    lstub_transition *without = make_transition(board, &via, ports, LSTUB_STUBS_REMOVED);
    lstub_transition *pair_drilled = make_transition(board, &pair, ports, LSTUB_STUBS_KEPT);

    printf("A via of an invented board from TOP to IN3, with 5 mm of trace on either side, at 16 GHz: Nyquist of 32 GBd NRZ.\n"
           "Caused by the stub: what differs from the same via without it. Ripple: of the loss about a smooth one, to Nyquist.\n"
           "TDR: least and greatest impedance that an edge of 15 ps sees from TOP.\n\n"
           "%-18s%8s%9s%9s%9s%9s%9s%9s%9s%7s\n", "", "stub", "loss", "caused", "ripple", "S11", "change", "notch", "TDR", "TDR");
    printf("%-18s%8s%9s%9s%9s%9s%9s%9s%9s%7s\n", "", "mm", "dB", "dB", "dB rms", "dB", "of S11", "GHz", "ohm", "ohm");
    show("via_as_it_is", as_it_is, without, stub.length);
    show("via_drilled", drilled_back, without, residual);
    show("via_without_stub", without, without, 0.0);
    printf("\n");
    const int32_t remarks = lstub_transition_remarks(as_it_is);
    for (int32_t one = 1; one <= remarks; one *= 2)
        if (remarks & one)
            printf("Rests on: %s.\n", lstub_remark_text(one));
    printf("Estimates from a model: verify critical links by measurement or full-wave simulation, and confirm with the\n"
           "fabricator what its drill can hold.\n\n");
    save(argv[2], "via_as_it_is", as_it_is);
    save(argv[2], "via_drilled", drilled_back);
    save(argv[2], "via_without_stub", without);
    save(argv[2], "pair_drilled", pair_drilled);

    lstub_transition_destroy(pair_drilled);
    lstub_transition_destroy(without);
    lstub_transition_destroy(drilled_back);
    lstub_transition_destroy(as_it_is);
    lstub_stackup_destroy(board);
    lstub_board_destroy(file);
    return 0;
}
