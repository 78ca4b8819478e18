/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A file of any kind and name, from its path to the sink: gzip, kinds, the built-in maps, and
 * a map that takes much of the file's name. */
#include <stdio.h>
#include <unistd.h>

#include "ingest/open.h"

#include "checked_log.h"
#include "fuzz.h"

static char path[] = "/tmp/rfade-fuzz-a_20260115_1_2-XXXXXX";

static void remove_file(void)
{
    (void)unlink(path);
}

static void write_file(const uint8_t *data, size_t size)
{
    static int descriptor = -1;
    if (descriptor < 0) {
        descriptor = mkstemp(path);
        if (descriptor < 0 || atexit(remove_file) != 0)
            abort();
    }
    if (ftruncate(descriptor, 0) != 0 || pwrite(descriptor, data, size, 0) != (ssize_t)size)
        abort();
}

static void read_with(const struct rfade_column_map *map)
{
    struct rfade_log_source *source = NULL;
    struct rfade_error error = {0};
    if (rfade_log_source_open(path, &source, &error) != RFADE_OK)
        abort();
    struct counts counts = {0};
    struct rfade_sink sink = checked_sink(&counts);
    struct rfade_ingest_names names = {.campaign = "fuzz", .vehicle = map ? NULL : "fuzz"};
    struct rfade_ingest_summary summary;
    enum rfade_status status =
        rfade_ingest(source, &map, map ? 1 : 0, &names, &sink, &summary, &error);
    FUZZ_REQUIRE(status == RFADE_OK || status == RFADE_INPUT || status == RFADE_STORAGE);
    FUZZ_REQUIRE(status == RFADE_OK || (error.what[0] && error.remedy[0]));
    FUZZ_REQUIRE(status != RFADE_OK ||
                 (summary.fixes == counts.fixes && summary.refused == counts.refused));
    rfade_log_source_close(source);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static const char text[] =
        "[file]\nname = rfade-fuzz-{vehicle}_{date}_{latitude}_{longitude}-*\n[time]\n"
        "column = time\ngnss_column = utc\nspread = yes\nbackward = refuse\noffset_s = -0.5\n"
        "[level]\ncolumn = rssi\n";
    static struct rfade_column_map *map;
    if (!map)
        map = map_of(text);
    write_file(data, size);
    read_with(NULL);
    read_with(map);
    return 0;
}
