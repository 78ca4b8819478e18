/* SPDX-License-Identifier: GPL-3.0-or-later */
/* D. H. Douglas and T. K. Peucker, Algorithms for the reduction of the number of points
 * required to represent a digitized line, Cartographica 10 (1973) 112-122. */
#include "route/driven_line.h"

#include <math.h>
#include <stdlib.h>

static const double gap_s = 300;
static const double standing_radius_m = 15;
static const double standing_s = 20;
static const double spacing_m = 20;
static const double smooth_m = 35;
static const double shortest_drive_m = 50;

static double distance_m(const struct rfade_place *a, const struct rfade_place *b)
{
    struct rfade_plane plane = rfade_plane_at(a);
    struct rfade_offset offset = rfade_plane_offset(&plane, b);
    return hypot(offset.east_m, offset.north_m);
}

static struct rfade_place place_of(const struct rfade_position *position)
{
    return (struct rfade_place){position->latitude_deg, position->longitude_deg};
}

static double seconds_between(const struct rfade_position *a, const struct rfade_position *b)
{
    return (double)(b->time_us - a->time_us) * 1e-6;
}

/* Places about a centre, averaged in its plane: longitudes may wrap. */
static struct rfade_place mean_place(const struct rfade_place *places, size_t first,
                                     size_t last)
{
    struct rfade_plane plane = rfade_plane_at(&places[first]);
    double east_m = 0;
    double north_m = 0;
    for (size_t i = first; i <= last; i++) {
        struct rfade_offset offset = rfade_plane_offset(&plane, &places[i]);
        east_m += offset.east_m;
        north_m += offset.north_m;
    }
    double n = (double)(last - first + 1);
    double longitude_deg = plane.longitude_deg + east_m / n / plane.east_m_per_deg;
    return (struct rfade_place){plane.latitude_deg + north_m / n / plane.north_m_per_deg,
                                remainder(longitude_deg, 360)};
}

/* The last position that a standstill begun at `first` reaches to; `first` if it is none. */
static size_t standstill_end(const struct rfade_position *positions, size_t first, size_t end)
{
    struct rfade_place origin = place_of(&positions[first]);
    struct rfade_plane plane = rfade_plane_at(&origin);
    double east_m = 0;
    double north_m = 0;
    size_t last = first;
    for (size_t i = first + 1; i < end; i++) {
        struct rfade_place place = place_of(&positions[i]);
        struct rfade_offset offset = rfade_plane_offset(&plane, &place);
        double n = (double)(i - first);
        if (hypot(offset.east_m - east_m / n, offset.north_m - north_m / n) > standing_radius_m)
            break;
        east_m += offset.east_m;
        north_m += offset.north_m;
        last = i;
    }
    return seconds_between(&positions[first], &positions[last]) >= standing_s ? last : first;
}

/* Every standstill becomes one place. Returns how many places there are. */
static size_t draw_together(const struct rfade_position *positions, size_t first, size_t end,
                            struct rfade_place *places)
{
    size_t count = 0;
    while (first < end) {
        size_t last = standstill_end(positions, first, end);
        size_t begin = count;
        for (size_t i = first; i <= last; i++)
            places[count++] = place_of(&positions[i]);
        if (last > first) {
            places[begin] = mean_place(places, begin, count - 1);
            count = begin + 1;
        }
        first = last + 1;
    }
    return count;
}

/* Each place becomes the mean of as many before as after it, all within smooth_m. */
static void smooth(const struct rfade_place *places, size_t count, struct rfade_place *smoothed)
{
    for (size_t i = 0; i < count; i++) {
        size_t reach = 0;
        while (i >= reach + 1 && i + reach + 1 < count &&
               distance_m(&places[i], &places[i - reach - 1]) <= smooth_m &&
               distance_m(&places[i], &places[i + reach + 1]) <= smooth_m)
            reach++;
        smoothed[i] = mean_place(places, i - reach, i + reach);
    }
}

static size_t thin(struct rfade_place *places, size_t count)
{
    size_t kept = count > 0 ? 1 : 0;
    for (size_t i = 1; i < count; i++)
        if (distance_m(&places[kept - 1], &places[i]) >= spacing_m)
            places[kept++] = places[i];
    if (count > 1) /* the line ends where the drive ended */
        places[kept > 1 ? kept - 1 : kept++] = places[count - 1];
    return kept;
}

static double off_chord_m(const struct rfade_plane *plane, const struct rfade_offset *chord,
                          const struct rfade_place *place)
{
    struct rfade_offset at = rfade_plane_offset(plane, place);
    double length2 = chord->east_m * chord->east_m + chord->north_m * chord->north_m;
    double along =
        length2 > 0 ? (at.east_m * chord->east_m + at.north_m * chord->north_m) / length2 : 0;
    along = fmin(fmax(along, 0), 1);
    return hypot(at.east_m - along * chord->east_m, at.north_m - along * chord->north_m);
}

/* Splits chords at the place furthest off until all are within the tolerance. A stack of
 * the ends to come takes the place of recursion. */
static bool simplify(struct rfade_place *places, size_t *count, double tolerance_m)
{
    if (*count < 3)
        return true;
    size_t *ends = malloc(*count * sizeof *ends);
    if (!ends)
        return false;
    size_t depth = 0;
    size_t kept = 1;
    size_t from = 0;
    ends[depth++] = *count - 1;
    while (depth > 0) {
        size_t to = ends[depth - 1];
        struct rfade_plane plane = rfade_plane_at(&places[from]);
        struct rfade_offset chord = rfade_plane_offset(&plane, &places[to]);
        double furthest_m = tolerance_m;
        size_t split = to;
        for (size_t i = from + 1; i < to; i++) {
            double off_m = off_chord_m(&plane, &chord, &places[i]);
            if (off_m > furthest_m) {
                furthest_m = off_m;
                split = i;
            }
        }
        if (split != to) {
            ends[depth++] = split;
            continue;
        }
        /* kept <= to: what is overwritten was passed already, but `from` is read again. */
        depth--;
        from = to;
        places[kept++] = places[to];
    }
    free(ends);
    *count = kept;
    return true;
}

struct stretch {
    size_t first;
    size_t end;
    double length_m;
};

/* The longest stretch without a gap, by the distance between places 50 m apart or more, which
 * scatter doesn't lengthen much. */
static struct stretch find_longest(const struct rfade_position *positions, size_t count)
{
    struct stretch longest = {0};
    struct stretch here = {0};
    struct rfade_place mark = count > 0 ? place_of(&positions[0]) : (struct rfade_place){0, 0};
    for (size_t i = 0; i < count; i++) {
        struct rfade_place place = place_of(&positions[i]);
        if (i > 0 && seconds_between(&positions[i - 1], &positions[i]) > gap_s) {
            here = (struct stretch){.first = i};
            mark = place;
        }
        double moved_m = distance_m(&mark, &place);
        if (moved_m >= shortest_drive_m) {
            here.length_m += moved_m;
            mark = place;
        }
        here.end = i + 1;
        if (here.length_m > longest.length_m || here.first == longest.first)
            longest = here;
    }
    return longest;
}

enum rfade_status rfade_driven_line(const struct rfade_position *positions, size_t count,
                                    double tolerance_m, struct rfade_place **places,
                                    size_t *place_count, struct rfade_error *error)
{
    *places = NULL;
    *place_count = 0;
    if (!(tolerance_m > 0))
        return rfade_error_set(error, RFADE_DOMAIN, "give a tolerance above 0 m",
                               "a tolerance of %g m is impossible", tolerance_m);
    struct stretch drive = find_longest(positions, count);
    if (!(drive.length_m >= shortest_drive_m) || drive.end <= drive.first)
        return rfade_error_set(error, RFADE_NO_DATA, "name a vehicle that has driven the road",
                               "the vehicle's fixes hold no drive of %g m", shortest_drive_m);
    size_t most = drive.end - drive.first;
    struct rfade_place *raw = malloc(most * sizeof *raw);
    struct rfade_place *line = malloc(most * sizeof *line);
    bool complete = raw && line;
    size_t used = 0;
    if (complete) {
        used = draw_together(positions, drive.first, drive.end, raw);
        smooth(raw, used, line);
        used = thin(line, used);
        complete = simplify(line, &used, tolerance_m);
    }
    free(raw);
    if (!complete) {
        free(line);
        return rfade_error_no_memory(error);
    }
    *places = line;
    *place_count = used;
    return RFADE_OK;
}
