/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <math.h>

#include "cli/acceptance.h"
#include "common/text.h"
#include "output/number.h"

/* Names may come from logs: a terminal must not see their control characters. */
static void write_name(FILE *stream, const char *kind, const char *name)
{
    char text[RFADE_NAME_SIZE];
    (void)snprintf(text, sizeof text, "%s", name);
    rfade_text_printable(text);
    (void)fprintf(stream, "%s %s", kind, text);
}

/* Whole percents, but never 0 or 100 for what is neither: with one decimal, cut off. */
static void write_share(FILE *stream, double part_m, double length_m)
{
    double percent = 100.0 * part_m / length_m;
    bool near_end = percent > 0.0 && percent < 100.0 && (percent < 1.0 || percent > 99.0);
    if (near_end)
        (void)fprintf(stream, "%.1f %%", fmax(0.1, floor(10.0 * percent) / 10.0));
    else
        (void)fprintf(stream, "%.0f %%", percent);
}

static void write_probability(FILE *stream, double value)
{
    char text[RFADE_NUMBER_SIZE];
    int place = value > 0.0 ? (int)floor(log10(value)) - 1 : -3;
    rfade_probability_rounded(value, place, text);
    (void)fputs(text, stream);
}

static void write_lengths(FILE *stream, const struct rfade_acceptance_page *page, size_t index)
{
    const struct rfade_acceptance_lengths *lengths = &page->lengths[index];
    double length_m = lengths->length_m;
    write_share(stream, lengths->meets_m, length_m);
    (void)fprintf(stream,
                  " of the route meets the target (outage at most %g) with %g %% confidence; ",
                  page->target.outage, 100.0 * page->target.confidence);
    write_share(stream, lengths->fails_m, length_m);
    (void)fputs(" fails it; ", stream);
    write_share(stream, lengths->undecided_m, length_m);
    (void)fputs(" is undecided", stream);
    if (lengths->not_judged_m > 0.0) {
        (void)fputs("; ", stream);
        write_share(stream, lengths->not_judged_m, length_m);
        (void)fputs(" can't be judged from these logs", stream);
    }
    if (lengths->unseen_m > 0.0) {
        (void)fputs("; ", stream);
        write_share(stream, lengths->unseen_m, length_m);
        (void)fputs(" was never driven", stream);
    }
    (void)fputs(".\nThe confidence is that of each segment's own verdict; ", stream);
    write_share(stream, lengths->meets_together_m, length_m);
    (void)fprintf(stream,
                  " of the route meets the target with %g %% confidence for all of it "
                  "together.\n",
                  100.0 * page->target.confidence);
}

/* One pass tells nothing of how passes differ: its verdicts hold for its conditions alone. */
static void write_driven_once(FILE *stream, const struct rfade_acceptance_page *page,
                              size_t index)
{
    const struct rfade_route_group *group = &page->groups->groups[index];
    const struct rfade_segment_acceptance *segments = rfade_acceptance_segments(page, index);
    double once_m = 0.0;
    for (size_t i = 0; i < group->count; i++)
        if (group->rows[i]->passes == 1 && segments[i].judgement.verdict != RFADE_NOT_JUDGED)
            once_m += group->rows[i]->to_m - group->rows[i]->from_m;
    if (once_m == 0.0)
        return;
    write_share(stream, once_m, page->lengths[index].length_m);
    (void)fputs(" of the route was driven once: verdicts there hold for the conditions of that "
                "pass alone.\n",
                stream);
}

static void write_place(FILE *stream, const struct rfade_segment_result *row)
{
    (void)fprintf(stream, "  segment %" PRId64 " (%.0f to %.0f m)", row->segment, row->from_m,
                  row->to_m);
}

static void write_undecided(FILE *stream, const struct rfade_segment_result *row,
                            const struct rfade_segment_acceptance *segment)
{
    const struct rfade_outage_bounds *bounds = &segment->bounds;
    const struct rfade_judgement *judgement = &segment->judgement;
    write_place(stream, row);
    (void)fputs(" is undecided, outage ", stream);
    write_probability(stream, rfade_from_log_odds(bounds->log_odds - bounds->below));
    (void)fputs(" to ", stream);
    write_probability(stream, rfade_from_log_odds(bounds->log_odds + bounds->above));
    (void)fputs(": ", stream);
    if (!isnan(judgement->more_m))
        (void)fprintf(stream, "%.0f m of travel more, or %.0f %s, would settle it\n",
                      judgement->more_m, judgement->more_passes,
                      judgement->more_passes == 1.0 ? "pass" : "passes");
    else if (!isnan(judgement->calibration_needed_db))
        (void)fprintf(stream,
                      "no number of passes settles it while the calibration is uncertain by "
                      "%.2g dB; less than %.2g dB%s would\n",
                      bounds->calibration_db, judgement->calibration_needed_db,
                      judgement->calibration_is_enough ? "" : ", and more passes,");
    else
        (void)fputs("its estimate is at the target\n", stream);
}

static void write_not_judged(FILE *stream, const struct rfade_segment_result *row,
                             const struct rfade_segment_acceptance *segment)
{
    write_place(stream, row);
    (void)fprintf(stream, " is not judged (%s)", row->sampling);
    if (!isnan(segment->bounds.observed.fraction)) {
        (void)fputs(": below the threshold on ", stream);
        write_probability(stream, segment->bounds.observed.fraction);
        (void)fputs(" of the travel", stream);
    }
    (void)fputc('\n', stream);
}

void rfade_acceptance_words(FILE *stream, const struct rfade_acceptance_page *page)
{
    for (size_t i = 0; i < page->groups->count; i++) {
        const struct rfade_route_group *group = &page->groups->groups[i];
        const struct rfade_segment_acceptance *segments = rfade_acceptance_segments(page, i);
        (void)fputc('\n', stream);
        write_name(stream, "Route", group->rows[0]->route);
        write_name(stream, ", channel", group->rows[0]->channel);
        write_name(stream, ", campaign", group->rows[0]->campaign);
        (void)fputs(": ", stream);
        write_lengths(stream, page, i);
        write_driven_once(stream, page, i);
        if (page->lengths[i].undecided_m > 0.0)
            (void)fputs("If the estimates stayed where they are:\n", stream);
        for (size_t s = 0; s < group->count; s++)
            if (segments[s].judgement.verdict == RFADE_UNDECIDED)
                write_undecided(stream, group->rows[s], &segments[s]);
        if (page->lengths[i].not_judged_m > 0.0)
            (void)fputs("What was observed where nothing can be concluded:\n", stream);
        for (size_t s = 0; s < group->count; s++)
            if (segments[s].judgement.verdict == RFADE_NOT_JUDGED)
                write_not_judged(stream, group->rows[s], &segments[s]);
    }
}
