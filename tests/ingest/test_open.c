/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Files: hashed, unpacked, recognised, matched to maps, found in folders. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>
#include <zlib.h>

#include "ingest/collect.h"
#include "ingest/walk.h"

static struct collected got;

#define LOG "time,rssi\n2026-01-15T20:15:00Z,-80\n2026-01-15T20:15:01Z,-81\n"

/* FIPS 180-4 examples (NIST, SHA256.pdf): "abc", and the 448-bit message. */
static void the_stored_bytes_are_hashed(void **state)
{
    (void)state;
    static const struct {
        const char *bytes;
        const char *sha256;
    } cases[] = {{"abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"},
                 {"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq",
                  "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_log_source *source = NULL;
        size_t size = strlen(cases[i].bytes);
        char text[2 * RFADE_SHA256_SIZE + 1];
        assert_int_equal(
            rfade_log_source_open(write_log("hash", cases[i].bytes, size), &source, NULL),
            RFADE_OK);
        assert_int_equal(rfade_log_source_size_bytes(source), size);
        for (size_t k = 0; k < RFADE_SHA256_SIZE; k++)
            (void)sprintf(text + 2 * k, "%02x", rfade_log_source_sha256(source)[k]);
        assert_string_equal(text, cases[i].sha256);
        rfade_log_source_close(source);
    }
}

static const char *write_gzip(const char *name, const char *text, size_t keep)
{
    static char path[256];
    (void)snprintf(path, sizeof path, "%s/%s", test_folder(), name);
    gzFile file = gzopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(gzwrite(file, text, (unsigned)strlen(text)), strlen(text));
    assert_int_equal(gzclose(file), Z_OK);
    if (keep > 0)
        assert_int_equal(truncate(path, (off_t)keep), 0);
    return path;
}

static void gzip_is_read_like_plain_text(void **state)
{
    (void)state;
    struct rfade_ingest_names names = {.vehicle = "v"};
    collect_file(&got, write_gzip("log.gz", LOG, 0), NULL, 0, &names);
    assert_int_equal(got.status, RFADE_OK);
    struct collected plain;
    collect_file(&plain, write_log("log", LOG, strlen(LOG)), NULL, 0, &names);
    assert_int_equal(plain.reading_count, 2);
    assert_int_equal(got.reading_count, 2);
    assert_memory_equal(got.readings, plain.readings, sizeof got.readings);
    assert_int_equal(got.summary.lines, plain.summary.lines);
}

static void a_damaged_gzip_file_is_refused(void **state)
{
    (void)state;
    struct rfade_ingest_names names = {.vehicle = "v"};
    char text[20000] = "time,rssi\n";
    size_t used = strlen(text);
    for (int i = 0; i < 500; i++)
        used += (size_t)sprintf(text + used, "%d,%d\n", 1768508100 + i, -60 - i * 7919 % 41);
    collect_file(&got, write_gzip("cut.gz", text, 1000), NULL, 0, &names);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "gzip"));
    assert_non_null(strstr(got.error.file, "cut.gz"));
}

static void files_of_another_kind_are_refused_whole(void **state)
{
    (void)state;
    static const struct {
        const char *bytes;
        size_t size;
        const char *what;
    } cases[] = {
        {"PK\x03\x04\x14\0\x06\0", 8, "XLSX"},
        {"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1", 8, "XLS"},
        {"SQLite format 3", 16, "SQLite"},
        {"\x89PNG\r\n\x1A\n", 8, "PNG"},
        {"\xFF\xD8\xFF\xE0\0\x10JFIF", 10, "JPEG"},
        {"GIF89a", 6, "GIF"},
        {"7z\xBC\xAF\x27\x1C\0\4", 8, "7z"},
        {"Rar!\x1A\x07\x01\0", 8, "RAR"},
        {"%PDF-1.7\n", 9, "PDF"},
        {"\xFF\xFEt\0i\0", 6, "UTF-16"},
        {"\xFD"
         "7zXZ\0",
         6, "xz"},
        {"BZh91AY", 7, "bzip2"},
        {"\x28\xB5\x2F\xFD\x24", 5, "zstd"},
        {"<?xml version=\"1.0\"?><kml/>", 27, "XML"},
        {"<html></html>", 13, "markup"},
        {"\x01\x02\x03\x04\x05\x06\x07\x01\x02\x03\x04\x05\x06\x07\x01\x02\x03\x04\x05\x06", 20,
         "binary"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        collect_bytes(&got, NULL, cases[i].bytes, cases[i].size);
        assert_int_equal(got.status, RFADE_INPUT);
        if (!strstr(got.error.what, cases[i].what))
            fail_msg("%s: %s", cases[i].what, got.error.what);
        assert_true(strlen(got.error.remedy) > 0);
        assert_int_equal(got.reading_count, 0);
    }
}

static void a_time_in_brackets_is_no_json(void **state)
{
    (void)state;
    collect_text(&got, "[file]\nheader = no\n[time]\ncolumn = 1\n[level]\ncolumn = 2\n",
                 "[2026-01-15T20:15:00],-80\n");
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.reading_count, 1);
}

static void what_is_no_file_is_refused(void **state)
{
    (void)state;
    struct rfade_log_source *source = NULL;
    struct rfade_error error;
    char path[256];
    assert_int_equal(rfade_log_source_open("/nowhere/log.csv", &source, &error), RFADE_STORAGE);
    assert_string_equal(error.file, "/nowhere/log.csv");
    assert_int_equal(rfade_log_source_open(test_folder(), &source, &error), RFADE_INPUT);
    (void)snprintf(path, sizeof path, "%s/pipe", test_folder());
    assert_int_equal(mkfifo(path, 0600), 0);
    assert_int_equal(rfade_log_source_open(path, &source, &error), RFADE_INPUT);
    assert_null(source);
    assert_int_equal(unlink(path), 0);
}

static void a_file_that_changes_meanwhile_is_refused(void **state)
{
    (void)state;
    struct rfade_log_source *source = NULL;
    struct rfade_error error;
    struct rfade_ingest_summary summary;
    struct rfade_ingest_names names = {.vehicle = "v"};
    struct rfade_sink sink = {0};
    static const char comment[] = "time,lat,lon\n1768508100,0,0\n";
    const char *path = write_log("growing", comment, strlen(comment));
    assert_int_equal(rfade_log_source_open(path, &source, &error), RFADE_OK);
    FILE *file = fopen(path, "ab");
    assert_non_null(file);
    assert_true(fputs("1768508101,0,0\n", file) >= 0);
    assert_int_equal(fclose(file), 0);
    assert_int_equal(rfade_ingest(source, NULL, 0, &names, &sink, &summary, &error),
                     RFADE_STORAGE);
    assert_non_null(strstr(error.what, "changed"));
    rfade_log_source_close(source);
}

#define TIME_MAP "[time]\ncolumn = t\n"

static void the_map_with_most_columns_is_taken(void **state)
{
    (void)state;
    struct rfade_column_map *narrow = good_map(TIME_MAP "[level]\ncolumn = a\n");
    struct rfade_column_map *wide = good_map(TIME_MAP "[level one]\ncolumn = a\n"
                                                      "[level two]\ncolumn = b\n");
    struct rfade_column_map *other = good_map(TIME_MAP "[level]\ncolumn = c\n");
    const struct rfade_column_map *maps[] = {narrow, wide, other};
    struct rfade_ingest_names names = {.vehicle = "v"};
    collect_file(&got, write_log("log", "t,a,b\n1768508100,-80,-81\n", 25), maps, 3, &names);
    assert_int_equal(got.reading_count, 2);
    assert_string_equal(got.readings[1].channel, "two");
    collect_file(&got, write_log("log", "t,c,d\n1768508100,-80,-81\n", 25), maps, 3, &names);
    assert_int_equal(got.reading_count, 1);
    collect_file(&got, write_log("log", "t,a,c\n1768508100,-80,-81\n", 25), maps, 3, &names);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "two column maps fit equally well"));
    collect_file(&got, write_log("log", "t,e,f\n1768508100,-80,-81\n", 25), maps, 3, &names);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "none of the column maps fits"));
    collect_file(&got, write_log("log", LOG, strlen(LOG)), maps, 3, &names);
    assert_int_equal(got.status, RFADE_OK); /* the header says enough by itself */
    assert_string_equal(got.summary.map_name, "the built-in column map");
    rfade_column_map_destroy(narrow);
    rfade_column_map_destroy(wide);
    rfade_column_map_destroy(other);
}

static void make_file(const char *folder, const char *name)
{
    char path[512];
    (void)snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(fclose(file), 0);
}

static void a_folder_is_walked_in_order_and_only_once_round(void **state)
{
    (void)state;
    char folder[256];
    char inner[300];
    char path[512];
    (void)snprintf(folder, sizeof folder, "%s/walk", test_folder());
    (void)snprintf(inner, sizeof inner, "%s/b", folder);
    assert_int_equal(mkdir(folder, 0700), 0);
    assert_int_equal(mkdir(inner, 0700), 0);
    make_file(folder, "c.csv");
    make_file(folder, "a 1.csv");
    make_file(folder, "B.csv");
    make_file(folder, ".hidden");
    make_file(inner, "z.csv");
    (void)snprintf(path, sizeof path, "%s/loop", inner);
    assert_int_equal(symlink("..", path), 0);
    struct rfade_path_list list = {0};
    assert_int_equal(rfade_path_list_add(&list, folder, NULL), RFADE_OK);
    static const char *const expected[] = {"/B.csv", "/a 1.csv", "/b/z.csv", "/c.csv"};
    assert_int_equal(list.count, 4);
    for (size_t i = 0; i < 4; i++)
        assert_string_equal(list.paths[i] + strlen(folder), expected[i]);
    (void)snprintf(path, sizeof path, "%s/c.csv", folder);
    assert_int_equal(rfade_path_list_add(&list, path, NULL), RFADE_OK);
    assert_int_equal(list.count, 5);
    struct rfade_error error;
    assert_int_equal(rfade_path_list_add(&list, "/nowhere", &error), RFADE_STORAGE);
    assert_string_equal(error.file, "/nowhere");
    assert_int_equal(list.count, 5);
    rfade_path_list_clear(&list);
    assert_int_equal(list.count, 0);
}

static void folders_nested_too_deeply_are_refused(void **state)
{
    (void)state;
    char path[512];
    int used = snprintf(path, sizeof path, "%s/deep", test_folder());
    size_t root = (size_t)used;
    for (int i = 0; i < 34; i++) {
        assert_int_equal(mkdir(path, 0700), 0);
        used += snprintf(path + used, sizeof path - (size_t)used, "/d");
    }
    path[root] = '\0';
    struct rfade_path_list list = {0};
    assert_int_equal(rfade_path_list_add(&list, path, NULL), RFADE_INPUT);
    assert_int_equal(list.count, 0);
    rfade_path_list_clear(&list);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_stored_bytes_are_hashed),
        cmocka_unit_test(gzip_is_read_like_plain_text),
        cmocka_unit_test(a_damaged_gzip_file_is_refused),
        cmocka_unit_test(files_of_another_kind_are_refused_whole),
        cmocka_unit_test(a_time_in_brackets_is_no_json),
        cmocka_unit_test(what_is_no_file_is_refused),
        cmocka_unit_test(a_file_that_changes_meanwhile_is_refused),
        cmocka_unit_test(the_map_with_most_columns_is_taken),
        cmocka_unit_test(a_folder_is_walked_in_order_and_only_once_round),
        cmocka_unit_test(folders_nested_too_deeply_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
