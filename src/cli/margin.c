/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "cli/reception.h"
#include "cli/segment_rows.h"
#include "cli/threshold.h"

struct margin_options {
    struct rfade_segment_options segments;
    struct rfade_reception_options reception;
    struct rfade_threshold_options threshold;
    double target_outage;
    double target_ber;
    double target_ser;
    double target_per;
    double packet_bits;
    bool block_fading;
    const char *modulation;
};

static const struct margin_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                               .reception = RFADE_RECEPTION_DEFAULTS,
                                               .threshold = RFADE_THRESHOLD_DEFAULTS,
                                               .target_outage = NAN,
                                               .target_ber = NAN,
                                               .target_ser = NAN,
                                               .target_per = NAN,
                                               .packet_bits = NAN};

#define TARGET(member) offsetof(struct margin_options, member)

static const struct rfade_option options[] = {
    {"target-outage", "P", RFADE_OPTION_NUMBER, TARGET(target_outage), 1e-12, 0.999, NULL,
     "share of the way that may lie below the threshold"},
    RFADE_THRESHOLD_OPTION_LINES(struct margin_options),
    {"target-ber", "P", RFADE_OPTION_NUMBER, TARGET(target_ber), 1e-12, 0.5, NULL,
     "mean bit error rate to be met, with --modulation"},
    {"target-ser", "P", RFADE_OPTION_NUMBER, TARGET(target_ser), 1e-12, 0.999, NULL,
     "mean symbol error rate to be met, with --modulation"},
    {"target-per", "P", RFADE_OPTION_NUMBER, TARGET(target_per), 1e-12, 0.999, NULL,
     "mean packet error rate to be met, with --modulation and --packet-bits"},
    {"packet-bits", "N", RFADE_OPTION_NUMBER, TARGET(packet_bits), 1, RFADE_PACKET_BITS_MAX,
     NULL, "uncoded bits of a packet"},
    {"block-fading", NULL, RFADE_OPTION_FLAG, TARGET(block_fading), 0, 0, NULL,
     "the fading stands still over a packet; if not told every bit fades for itself"},
    {"modulation", "M", RFADE_OPTION_TEXT, TARGET(modulation), 0, 0, NULL,
     "bpsk, qpsk, 8psk, 16qam, 64qam, 256qam, dbpsk or ncfsk2"},
    RFADE_RECEPTION_OPTION_LINES(struct margin_options),
    RFADE_SEGMENT_OPTION_LINES(struct margin_options)};

/* What is to be met; `threshold` of an outage. */
struct goal {
    struct rfade_target target;
    struct rfade_threshold_asked threshold;
};

static enum rfade_status take_modulation(const struct margin_options *asked, struct goal *goal,
                                         struct rfade_error *error)
{
    if (!asked->modulation)
        return rfade_usage(error, &rfade_command_margin, "an error rate needs --modulation");
    return rfade_modulation_take(&rfade_command_margin, asked->modulation,
                                 &goal->target.modulation, error);
}

/* The one target that was given. */
static enum rfade_status choose_kind(const struct margin_options *asked, struct goal *goal,
                                     struct rfade_error *error)
{
    const struct {
        double value;
        enum rfade_target_kind kind;
    } given[] = {{asked->target_outage, RFADE_TARGET_OUTAGE},
                 {asked->target_ber, RFADE_TARGET_BIT},
                 {asked->target_ser, RFADE_TARGET_SYMBOL},
                 {asked->target_per, asked->block_fading ? RFADE_TARGET_PACKET_BLOCK
                                                         : RFADE_TARGET_PACKET_INDEPENDENT}};
    int count = 0;
    for (size_t i = 0; i < sizeof given / sizeof given[0]; i++) {
        if (isnan(given[i].value))
            continue;
        goal->target.kind = given[i].kind;
        goal->target.value = given[i].value;
        count++;
    }
    if (count != 1)
        return rfade_usage(error, &rfade_command_margin,
                           "exactly one of --target-outage, --target-ber, --target-ser and "
                           "--target-per is needed");
    return RFADE_OK;
}

static enum rfade_status take_goal(const struct margin_options *asked, struct goal *goal,
                                   struct rfade_error *error)
{
    *goal =
        (struct goal){.target = {.packet_bits = asked->packet_bits}, .threshold = {NULL, NAN}};
    enum rfade_status status = choose_kind(asked, goal, error);
    if (status != RFADE_OK)
        return status;
    if (goal->target.kind == RFADE_TARGET_OUTAGE)
        return rfade_threshold_choose(&rfade_command_margin, &asked->threshold,
                                      &goal->threshold, error);
    if (!isnan(asked->target_per) && isnan(asked->packet_bits))
        return rfade_usage(error, &rfade_command_margin, "--target-per needs --packet-bits");
    return take_modulation(asked, goal, error);
}

/* The level at which a row's SNR counts as 0 dB: for an outage that is its threshold. */
static enum rfade_status reference_of(const struct rfade_segment_result *row,
                                      const struct margin_options *asked,
                                      const struct goal *goal, double *reference_dbm,
                                      struct rfade_error *error)
{
    if (goal->target.kind != RFADE_TARGET_OUTAGE)
        return rfade_reception_reference(row, &asked->reception, reference_dbm, error);
    struct rfade_threshold here = {NAN, NAN};
    enum rfade_status status = rfade_threshold_here(row, &goal->threshold, &here, error);
    *reference_dbm = here.level_dbm - asked->reception.other_direction_db;
    return status;
}

struct page {
    const struct margin_options *asked;
    const struct goal *goal;
    double *reference_dbm;
    struct rfade_segment_margin *margins;
};

static enum rfade_status answer_rows(struct page *page, struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    struct rfade_reception reception = rfade_reception_take(&page->asked->reception);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status = reference_of(&results->rows[i], page->asked, page->goal,
                              &page->reference_dbm[i], error);
    if (status == RFADE_OK)
        status = rfade_results_margins(results, &reception, page->reference_dbm,
                                       &page->goal->target, page->margins, error);
    return status;
}

/* What a row is held against, so that it can be read without the command line. */
static void goal_values(const struct goal *goal, struct rfade_value values[5])
{
    const struct rfade_target *target = &goal->target;
    bool packet = target->kind == RFADE_TARGET_PACKET_INDEPENDENT ||
                  target->kind == RFADE_TARGET_PACKET_BLOCK;
    values[0] = rfade_value_text(rfade_target_kind_name(target->kind));
    values[1] = rfade_value_number(target->value);
    values[2] =
        rfade_value_text(target->modulation ? rfade_modulation_name(target->modulation) : NULL);
    values[3] = rfade_value_number(packet ? target->packet_bits : NAN);
    values[4] = rfade_value_number(goal->threshold.value);
}

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    const struct page *page = context;
    const struct rfade_segment_margin *margin = &page->margins[index];
    own[0] = rfade_value_number(margin->required_db);
    own[1] = rfade_value_number(margin->margin_db);
    own[2] = rfade_value_number(margin->low_db);
    own[3] = rfade_value_number(margin->high_db);
    rfade_threshold_noise_values(&page->goal->threshold, row, &own[4]);
    own[6] = rfade_value_text(row->sampling);
    own[7] = rfade_value_integer(row->passes);
    goal_values(page->goal, &own[8]);
    rfade_reception_values(&page->asked->reception, &own[13]);
}

/* Metres that fall short, and metres that may: whose interval holds both signs. */
static void tell_metres(const struct rfade_run *run, const struct page *page,
                        const struct rfade_segment_results *results)
{
    double all_m = 0.0, short_m = 0.0, surely_m = 0.0, unknown_m = 0.0;
    for (size_t i = 0; i < results->count; i++) {
        const struct rfade_segment_margin *margin = &page->margins[i];
        double length_m = results->rows[i].to_m - results->rows[i].from_m;
        all_m += length_m;
        unknown_m += isnan(margin->margin_db) ? length_m : 0.0;
        short_m += margin->margin_db < 0.0 ? length_m : 0.0;
        surely_m += margin->high_db < 0.0 ? length_m : 0.0;
    }
    if (run->common->quiet || results->count == 0)
        return;
    (void)fprintf(
        run->notes,
        "of %.0f m that were measured, each channel and campaign counted, %.0f m fall "
        "short of the target, %.0f m of them by more than their interval",
        all_m, short_m, surely_m);
    if (unknown_m > 0.0)
        (void)fprintf(run->notes, "; of %.0f m nothing can be said", unknown_m);
    (void)fputs("\n", run->notes);
}

static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct page *page = context;
    return by_estimate ? -page->margins[index].margin_db : -page->margins[index].high_db;
}

static enum rfade_status show(const struct rfade_run *run, const struct page *page,
                              const struct rfade_segment_results *results,
                              struct rfade_error *error)
{
    /* Without a threshold its column is that of SNR, and empty. */
    const char *threshold = page->goal->threshold.column;
    const struct rfade_column columns[] = {
        {"required_db", RFADE_COLUMN_NUMBER, 1, false, false},
        {"margin_db", RFADE_COLUMN_NUMBER, 1, true, false},
        {"margin_low_db", RFADE_COLUMN_NUMBER, 1, false, false},
        {"margin_high_db", RFADE_COLUMN_NUMBER, 1, false, false},
        {"noise_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
        {"noise", RFADE_COLUMN_TEXT, 0, false, false},
        {"sampling", RFADE_COLUMN_TEXT, 0, false, false},
        {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
        {"target", RFADE_COLUMN_TEXT, 0, false, true},
        {"target_value", RFADE_COLUMN_PROBABILITY, 2, false, true},
        {"modulation", RFADE_COLUMN_TEXT, 0, false, true},
        {"packet_bits", RFADE_COLUMN_NUMBER, 0, false, true},
        {threshold ? threshold : "threshold_db", RFADE_COLUMN_NUMBER, 1, false, true},
        {"branches", RFADE_COLUMN_INTEGER, 0, false, true},
        {"combining", RFADE_COLUMN_TEXT, 0, false, true},
        {"other_direction_db", RFADE_COLUMN_NUMBER, 1, false, true},
    };
    const struct rfade_segment_table table = {.columns = columns,
                                              .column_count =
                                                  sizeof columns / sizeof columns[0],
                                              .values = own_values,
                                              .badness = badness_of,
                                              .context = page};
    struct rfade_segment_options order = page->asked->segments;
    if (order.worst == 0) /* worst first, all of them */
        order.worst = (int64_t)results->count;
    return rfade_segment_print(run, &table, &order, results, error);
}

static enum rfade_status run_margin(struct rfade_run *run, struct rfade_error *error)
{
    const struct margin_options *asked = run->options;
    struct goal goal;
    struct rfade_segment_results results = {.rows = NULL};
    enum rfade_status status = take_goal(asked, &goal, error);
    if (status == RFADE_OK)
        status =
            rfade_segment_read(run, &rfade_command_margin, &asked->segments, &results, error);
    if (status != RFADE_OK)
        return status;
    struct page page = {asked, &goal, calloc(results.count + 1, sizeof *page.reference_dbm),
                        calloc(results.count + 1, sizeof *page.margins)};
    if (!page.reference_dbm || !page.margins) {
        (void)rfade_error_no_memory(error);
        status = RFADE_NO_MEMORY;
    }
    if (status == RFADE_OK)
        status = answer_rows(&page, &results, error);
    if (status == RFADE_OK)
        status = show(run, &page, &results, error);
    if (status == RFADE_OK)
        tell_metres(run, &page, &results);
    if (status == RFADE_OK)
        rfade_segment_note_passes(run, &results);
    free(page.reference_dbm);
    free(page.margins);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_margin = {
    .name = "margin",
    .summary = "show how many dB each segment has to spare, or lacks, for a target",
    .details =
        "Worst first. margin_db is by how much the level could fall everywhere on the segment, "
        "its fading as it is, before the target is missed; negative: what it lacks. "
        "required_db is the mean power at which the target is just met: over the threshold for "
        "an outage, over the noise in the symbol (Es/N0) for an error rate. The 95 % interval "
        "comes from the fading's parameter and the level. Ranked by the interval's better end, "
        "with --by-estimate by margin_db. Raw error rates of an ideal receiver; transmit only "
        "as licensed; no prediction is a safety case.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_margin,
};
