/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "cli/reception.h"
#include "cli/segment_rows.h"

struct error_rate_options {
    struct rfade_segment_options segments;
    struct rfade_reception_options reception;
    struct rfade_texts modulations;
};

static const struct error_rate_options defaults = {.segments = RFADE_SEGMENT_DEFAULTS,
                                                   .reception = RFADE_RECEPTION_DEFAULTS};

static const struct rfade_option options[] = {
    {"modulation", "M", RFADE_OPTION_TEXTS, offsetof(struct error_rate_options, modulations), 0,
     0, NULL,
     "bpsk, qpsk, 8psk, 16qam, 64qam, 256qam, dbpsk or ncfsk2; may be given several times"},
    RFADE_RECEPTION_OPTION_LINES(struct error_rate_options),
    RFADE_SEGMENT_OPTION_LINES(struct error_rate_options)};

static const struct rfade_column columns[] = {
    {"modulation", RFADE_COLUMN_TEXT, 0, false, false},
    {"bit", RFADE_COLUMN_PROBABILITY, 3, true, false},
    {"bit_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"bit_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"symbol", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"bit_unfaded", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"bit_observed", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"bit_observed_low", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"bit_observed_high", RFADE_COLUMN_PROBABILITY, 3, false, false},
    {"mean_esn0_db", RFADE_COLUMN_NUMBER, 1, false, false},
    {"noise_dbm", RFADE_COLUMN_NUMBER, 1, false, false},
    {"noise", RFADE_COLUMN_TEXT, 0, false, false},
    {"sampling", RFADE_COLUMN_TEXT, 0, false, false},
    {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
    {"branches", RFADE_COLUMN_INTEGER, 0, false, true},
    {"combining", RFADE_COLUMN_TEXT, 0, false, true},
    {"other_direction_db", RFADE_COLUMN_NUMBER, 1, false, true},
};

/* What one segment says of one modulation. */
struct answer {
    struct rfade_segment_rate bit;
    double symbol;
    double bit_unfaded;
    struct rfade_observed_rate observed;
};

struct page {
    const struct error_rate_options *asked;
    const struct rfade_modulation *const *modulations; /* [modulation_count], borrowed */
    size_t modulation_count;
    double *reference_dbm;  /* [rows] */
    struct answer *answers; /* [rows][modulations] */
};

static void page_clear(struct page *page)
{
    free(page->reference_dbm);
    free(page->answers);
}

/* Room for the answers of so many rows. */
static enum rfade_status page_make_room(struct page *page, size_t rows,
                                        struct rfade_error *error)
{
    page->reference_dbm = calloc(rows + 1, sizeof *page->reference_dbm);
    page->answers = calloc((rows + 1) * page->modulation_count, sizeof *page->answers);
    if (page->reference_dbm && page->answers)
        return RFADE_OK;
    (void)rfade_error_no_memory(error);
    return RFADE_NO_MEMORY;
}

static enum rfade_status find_references(struct page *page,
                                         const struct rfade_segment_results *results,
                                         struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status = rfade_reception_reference(&results->rows[i], &page->asked->reception,
                                           &page->reference_dbm[i], error);
    return status;
}

/* The fitted fading's rates: the bits of all modulations, then the symbols. */
static enum rfade_status answer_faded(struct page *page, struct rfade_segment_results *results,
                                      struct rfade_error *error)
{
    size_t count = page->modulation_count;
    struct rfade_reception reception = rfade_reception_take(&page->asked->reception);
    struct rfade_target *targets = calloc(2 * count, sizeof *targets);
    struct rfade_segment_rate *rates = calloc((results->count + 1) * 2 * count, sizeof *rates);
    enum rfade_status status = RFADE_NO_MEMORY;
    if (!targets || !rates) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    for (size_t i = 0; i < count; i++) {
        const struct rfade_modulation *modulation = page->modulations[i];
        targets[i] = (struct rfade_target){.kind = RFADE_TARGET_BIT, .modulation = modulation};
        targets[count + i] =
            (struct rfade_target){.kind = RFADE_TARGET_SYMBOL, .modulation = modulation};
    }
    status = rfade_results_rates(results, &reception, page->reference_dbm, targets, 2 * count,
                                 count, rates, error);
    for (size_t i = 0; i < results->count * count && status == RFADE_OK; i++) {
        const struct rfade_segment_rate *row = &rates[i / count * 2 * count];
        page->answers[i].bit = row[i % count];
        page->answers[i].symbol = row[count + i % count].value;
    }
out:
    free(targets);
    free(rates);
    return status;
}

/* At the same mean SNR without fading. */
static enum rfade_status answer_unfaded(const struct page *page, size_t row, double esn0_db,
                                        struct rfade_error *error)
{
    struct rfade_reception reception = rfade_reception_take(&page->asked->reception);
    const struct rfade_link link = {.mean_snr_db = esn0_db,
                                    .branches = reception.branches,
                                    .combining = reception.combining};
    for (size_t i = 0; i < page->modulation_count; i++) {
        struct answer *answer = &page->answers[row * page->modulation_count + i];
        struct rfade_error_rate rate = {NAN, NAN, NAN, NAN};
        enum rfade_status status = rfade_error_rate_unfaded(&link, page->modulations[i], &rate);
        if (status != RFADE_OK)
            return rfade_error_set(error, status, "",
                                   "the unfaded error rate can't be computed: %s",
                                   rfade_status_text(status));
        answer->bit_unfaded = rate.bit;
    }
    return RFADE_OK;
}

/* Over the levels as they were observed: of one branch, since no more were. */
static enum rfade_status answer_observed(struct page *page,
                                         struct rfade_segment_results *results,
                                         struct rfade_error *error)
{
    size_t count = page->modulation_count;
    struct rfade_observed_rate *rates = calloc((results->count + 1) * count, sizeof *rates);
    if (!rates)
        return rfade_error_no_memory(error);
    enum rfade_status status = rfade_results_rates_observed(
        results, page->reference_dbm, page->modulations, count, rates, error);
    for (size_t i = 0; i < results->count * count && status == RFADE_OK; i++)
        page->answers[i].observed = page->asked->reception.branches > 1
                                        ? (struct rfade_observed_rate){NAN, NAN, NAN}
                                        : rates[i];
    free(rates);
    return status;
}

static enum rfade_status answer_rows(struct page *page, struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    enum rfade_status status = find_references(page, results, error);
    if (status == RFADE_OK)
        status = answer_faded(page, results, error);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++) {
        double esn0_db = results->rows[i].mean_power_dbm - page->reference_dbm[i];
        status = answer_unfaded(page, i, esn0_db, error);
    }
    return status == RFADE_OK ? answer_observed(page, results, error) : status;
}

/* By the first modulation; where nothing was predicted, what was observed speaks for itself. */
static double badness_of(const void *context, const struct rfade_segment_result *row,
                         size_t index, bool by_estimate)
{
    (void)row;
    const struct page *page = context;
    const struct answer *answer = &page->answers[index * page->modulation_count];
    double badness = by_estimate ? answer->bit.value : answer->bit.low;
    return isnan(badness) ? answer->observed.bit_low : badness;
}

static void own_values(const void *context, const struct rfade_segment_result *row,
                       size_t index, struct rfade_value *own)
{
    const struct page *page = context;
    const struct answer *answer = &page->answers[index];
    size_t count = page->modulation_count;
    own[0] = rfade_value_text(rfade_modulation_name(page->modulations[index % count]));
    own[1] = rfade_value_number(answer->bit.value);
    own[2] = rfade_value_number(answer->bit.low);
    own[3] = rfade_value_number(answer->bit.high);
    own[4] = rfade_value_number(answer->symbol);
    own[5] = rfade_value_number(answer->bit_unfaded);
    own[6] = rfade_value_number(answer->observed.bit);
    own[7] = rfade_value_number(answer->observed.bit_low);
    own[8] = rfade_value_number(answer->observed.bit_high);
    own[9] = rfade_value_number(row->mean_power_dbm - page->reference_dbm[index / count]);
    own[10] = rfade_value_number(row->noise_floor_dbm);
    own[11] = rfade_value_text(rfade_noise_source_name(row->noise_source));
    own[12] = rfade_value_text(row->sampling);
    own[13] = rfade_value_integer(row->passes);
    rfade_reception_values(&page->asked->reception, &own[14]);
}

static enum rfade_status show(const struct rfade_run *run, const struct page *page,
                              const struct rfade_segment_results *results,
                              struct rfade_error *error)
{
    const struct rfade_segment_table table = {.columns = columns,
                                              .column_count =
                                                  sizeof columns / sizeof columns[0],
                                              .values = own_values,
                                              .badness = badness_of,
                                              .context = page,
                                              .lines = page->modulation_count};
    return rfade_segment_print(run, &table, &page->asked->segments, results, error);
}

static enum rfade_status run_error_rate(struct rfade_run *run, struct rfade_error *error)
{
    const struct error_rate_options *asked = run->options;
    struct rfade_segment_results results = {.rows = NULL};
    const struct rfade_modulation *modulations[RFADE_MODULATION_COUNT] = {NULL};
    struct page page = {.asked = asked,
                        .modulations = modulations,
                        .modulation_count = asked->modulations.count};
    if (asked->modulations.count == 0 || asked->modulations.count > RFADE_MODULATION_COUNT)
        return rfade_usage(error, &rfade_command_error_rate,
                           "give 1 to %d modulations with --modulation",
                           RFADE_MODULATION_COUNT);
    enum rfade_status status = rfade_modulations_take(&rfade_command_error_rate,
                                                      &asked->modulations, modulations, error);
    if (status == RFADE_OK)
        status = rfade_segment_read(run, &rfade_command_error_rate, &asked->segments, &results,
                                    error);
    if (status == RFADE_OK)
        status = page_make_room(&page, results.count, error);
    if (status == RFADE_OK)
        status = answer_rows(&page, &results, error);
    if (status == RFADE_OK)
        status = show(run, &page, &results, error);
    if (status == RFADE_OK)
        rfade_segment_note_passes(run, &results);
    page_clear(&page);
    rfade_results_clear(&results);
    return status;
}

const struct rfade_command rfade_command_error_rate = {
    .name = "error-rate",
    .summary = "show the raw bit and symbol error rate of a modulation on each segment",
    .details =
        "bit is the mean bit error rate (Gray mapped, uncoded, exact) of the fitted fading "
        "along the segment, with the 95 % confidence interval that the fading's parameter and "
        "the level leave; symbol the mean symbol error rate; bit_unfaded that of a steady "
        "signal of the same mean SNR; bit_observed the mean over the readings themselves, "
        "without any model: what the model adds lies between the two. Readings below the "
        "receiver's floor may stand for any rate up to 1/2: where that matters (10 %), "
        "bit_observed is left out, and bit_observed_low and bit_observed_high say what is "
        "possible. mean_esn0_db is Es/N0 of "
        "the mean power: level less noise, times bandwidth over symbol rate; `noise` says "
        "where "
        "the noise comes from. Raw error rates of an ideal receiver: coding, synchronisation "
        "and adjacent channels are not in them. Transmit only as licensed; no prediction is a "
        "safety case.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_error_rate,
};
