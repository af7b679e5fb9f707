/* posts.json as it is read: every key, and one clear line for each thing that is wrong. */
#define _POSIX_C_SOURCE 200809L
#include "cards/scratch.h"

#include "cards/posts_read.h"

#include <math.h>

#define DIGEST "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef"

static const char posts[] =
    "{\"format\": \"falsework-posts/1\",\n"
    " \"units\": {\"length\": \"mm\", \"area\": \"mm2\", \"load\": \"N\"},\n"
    " \"raw_sha256\": \"" DIGEST "\",\n"
    " \"lift_layers\": 100,\n"
    " \"posts\": [\n"
    "  {\"id\": 4, \"locked\": true, \"routed\": true, \"tip_layer\": 120, \"raw_tip_layer\": 20,\n"
    "   \"bite_layers\": 2, \"path_mm\": [[10.5, 20.25, 6.0], [10.5, 21, 4], [10.5, 21, 0]],\n"
    "   \"tip_mm\": 0.4, \"neck_mm\": 1.5, \"shaft_mm\": 0.9, \"foot_mm\": 2, \"load_N\": 1.25,\n"
    "   \"load_layer\": 130, \"contact_mm2\": 0.125, \"governs\": \"tip\", \"margin\": null},\n"
    "  {\"margin\": 3, \"governs\": \"none\", \"contact_mm2\": 0, \"load_layer\": -1, \"load_N\": "
    "null,\n"
    "   \"foot_mm\": 3, \"shaft_mm\": 1, \"neck_mm\": 0, \"tip_mm\": 0.5, \"path_mm\": [[1, 2, "
    "7]],\n"
    "   \"bite_layers\": 1, \"raw_tip_layer\": 40, \"tip_layer\": 140, \"routed\": false,\n"
    "   \"locked\": false, \"id\": 9}]}\n";

static int clean(void **state)
{
    (void)state;
    scratch_remove((const char *const[]){"posts.json", NULL});
    return 0;
}

static void reads_every_key(void **state)
{
    (void)state;
    fw_posts list;
    char digest[FW_DIGEST_HEX];
    int32_t lift;
    fw_fault fault = {0};
    if (fw_posts_read(scratch_text("posts.json", posts), &list, digest, &lift, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    assert_string_equal(digest, DIGEST);
    assert_int_equal(lift, 100);
    assert_int_equal(list.count, 2);
    const fw_post *a = &list.item[0], *b = &list.item[1];
    assert_int_equal(a->id, 0);
    assert_true(a->locked && a->routed);
    assert_int_equal(a->tip_layer, 120);
    assert_int_equal(a->bite_layers, 2);
    assert_int_equal(a->point_count, 3);
    assert_true(a->path[0].x == 10.5 && a->path[0].y == 20.25 && a->path[0].z == 6);
    assert_true(a->path[2].x == 10.5 && a->path[2].y == 21 && a->path[2].z == 0);
    assert_true(a->tip_mm == 0.4 && a->neck_mm == 1.5 && a->shaft_mm == 0.9 && a->foot_mm == 2);
    assert_int_equal(b->id, 1);
    assert_false(b->locked || b->routed);
    assert_int_equal(b->point_count, 1);
    free(list.item);
}

static void no_posts_and_no_digest_are_fine(void **state)
{
    (void)state;
    fw_posts list;
    char digest[FW_DIGEST_HEX];
    int32_t lift;
    const char *path =
        scratch_text("posts.json",
                     "{\"format\":\"falsework-posts/1\",\"units\":{\"length\":\"mm\",\"area\":"
                     "\"mm2\",\"load\":\"N\"},\"raw_sha256\":\"\",\"lift_layers\":0,\"posts\":[]}");
    assert_int_equal(fw_posts_read(path, &list, digest, &lift, NULL), FW_OK);
    assert_int_equal(list.count, 0);
    assert_string_equal(digest, "");
    free(list.item);
}

typedef struct bad_case {
    const char *from, *to, *wanted;
} bad_case;

static void check(const char *path, const char *wanted)
{
    fw_posts list;
    char digest[FW_DIGEST_HEX];
    int32_t lift;
    fw_fault fault = {0};
    assert_int_equal(fw_posts_read(path, &list, digest, &lift, &fault), FW_INPUT);
    assert_null(list.item);
    assert_int_equal(list.count, 0);
    assert_null(strchr(fault.text, '\n'));
    if (strncmp(fault.text, path, strlen(path)) != 0 ||
        strncmp(fault.text + strlen(path), wanted, strlen(wanted)) != 0)
        fail_msg("wanted '%s%s', got '%s'", path, wanted, fault.text);
}

static void refuses_bad_files(void **state)
{
    (void)state;
    static const bad_case bad[] = {
        {"posts/1", "posts/2", ": format: expects \"falsework-posts/1\""},
        {"\"length\": \"mm\"", "\"length\": \"inch\"", ": units.length: expects \"mm\""},
        {"\"length\": \"mm\", ", "", ": units.length: missing"},
        {DIGEST, "abc", ": raw_sha256: expects 64 digits"},
        {DIGEST, "G123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef",
         ": raw_sha256: expects 64 digits"},
        {"\"" DIGEST "\"", "null", ": raw_sha256: expects 64 digits"},
        {"\"lift_layers\": 100", "\"lift_layers\": -1", ": lift_layers: -1 is out of range"},
        {"\"lift_layers\": 100", "\"lift_layers\": 1e2", ": lift_layers: is no whole number"},
        {"\"lift_layers\": 100", "\"lift\": 100", ": lift_layers: missing"},
        {"\"lift_layers\": 100", "\"lift_layers\": 100, \"lift_layer\": 1",
         ": lift_layer: no key of this format; leave it out, or did you mean lift_layers"},
        {"\"lift_layers\": 100", "\"lift_layers\": 100, \"lift_layers\": 100",
         ":4: no valid JSON (duplicate object key"},
        {"\"lift_layers\": 100", "\"lift_layers\": 99999999999999999999",
         ":4: no valid JSON (too big"},
        {"\"id\": 4", "\"id\": -4", ": posts[0].id: -4 is out of range"},
        {"\"id\": 4", "\"id\": 9", ": posts[1].id: 9 follows 9; ids must rise"},
        {"\"locked\": true", "\"locked\": 1", ": posts[0].locked: give true or false"},
        {"\"locked\": true, ", "", ": posts[0].locked: missing; add it"},
        {"\"tip_layer\": 120", "\"tip_layer\": 121",
         ": posts[0].raw_tip_layer: 20 and lift_layers 100 do not make tip_layer 121"},
        {"\"bite_layers\": 2", "\"bite_layers\": -1", ": posts[0].bite_layers: -1 is out of range"},
        {"[10.5, 21, 4]", "[10.5, 21]", ": posts[0].path_mm[1]: a point is three numbers"},
        {"[10.5, 21, 4]", "[10.5, \"21\", 4]", ": posts[0].path_mm[1]: is no number"},
        {"[10.5, 21, 4]", "[10.5, 1e9, 4]", ": posts[0].path_mm[1]: 1e+09 is out of range"},
        {"[10.5, 21, 4]", "[10.5, 1e999, 4]", ":7: no valid JSON (real number overflow"},
        {"[10.5, 21, 4]", "[10.5, NaN, 4]", ":7: no valid JSON ("},
        {"[10.5, 21, 4]", "[10.5, 21, 8]", ": posts[0].path_mm: point 1 is not nearer"},
        {"[10.5, 21, 0]", "[10.5, 21, 0.1]", ": posts[0].path_mm: ends at z 0.1 mm"},
        {"[[10.5, 20.25, 6.0], [10.5, 21, 4], [10.5, 21, 0]]", "[]",
         ": posts[0].path_mm: expects a list of 2 to 16 points"},
        {"[[10.5, 20.25, 6.0], [10.5, 21, 4], [10.5, 21, 0]]", "\"straight\"",
         ": posts[0].path_mm: expects a list"},
        {"[[10.5, 20.25, 6.0], [10.5, 21, 4], [10.5, 21, 0]]",
         "[[0,0,9],[0,0,8],[0,0,7],[0,0,6],[0,0,5],[0,0,4],[0,0,3],[0,0,2.9],[0,0,2.8],[0,0,2.7],"
         "[0,0,2.6],[0,0,2.5],[0,0,2.4],[0,0,2.3],[0,0,2.2],[0,0,2.1],[0,0,0]]",
         ": posts[0].path_mm: expects a list of 2 to 16 points"},
        {"\"tip_mm\": 0.4", "\"tip_mm\": 0", ": posts[0].tip_mm: 0 is out of range"},
        {"\"tip_mm\": 0.4", "\"tip_mm\": null", ": posts[0].tip_mm: is no number"},
        {"\"foot_mm\": 2,", "\"foot_mm\": -2,", ": posts[0].foot_mm: -2 is out of range"},
        {"\"load_N\": 1.25", "\"load_N\": \"1\"", ": posts[0].load_N: is no number"},
        {"\"load_N\": 1.25", "\"load_N\": -1.25", ": posts[0].load_N: -1.25 is out of range"},
        {"\"governs\": \"tip\"", "\"governs\": \"luck\"", ": posts[0].governs: expects none, tip"},
        {"\"governs\": \"tip\"", "\"governs\": 1", ": posts[0].governs: expects none, tip"},
        {"\"margin\": 3", "\"margin\": \"\"", ": posts[1].margin: is no number"},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        check(scratch_text("posts.json", scratch_replaced(posts, bad[i].from, bad[i].to)),
              bad[i].wanted);
}

static void refuses_what_is_no_posts_file(void **state)
{
    (void)state;
    check(scratch_text("posts.json", ""), ":1: no valid JSON");
    check(scratch_text("posts.json", "[]"), ": no posts file");
    check(scratch_text("posts.json", "{}"), ": format: missing");
    check(scratch_text("posts.json", "{\"format\": \"\xff\"}"), ":1: no valid JSON");
    check(scratch_path("absent.json"), ": cannot be opened");
    check(
        scratch_text("posts.json", scratch_replaced(posts, " \"posts\": [\n", " \"posts\": [7,\n")),
        ": posts[0]: is no object");
}

/* What a hostile file may cost: each of these is refused before memory or stack runs out. */
static void refuses_hostile_sizes(void **state)
{
    (void)state;
    enum { LARGE = (32 << 20) + 1, DEPTH = 1 << 20 };
    char *text = malloc(LARGE);
    assert_non_null(text);
    memset(text, '[', LARGE);
    check(scratch_bytes("posts.json", text, LARGE), ": larger than 33554432 bytes");
    check(scratch_bytes("posts.json", text, LARGE - 1), ": more values than any posts file holds");
    check(scratch_bytes("posts.json", text, DEPTH), ":1: no valid JSON (maximum parsing depth");
    free(text);
}

/* Any cut or changed byte is read or refused in one line (the sanitizers look for the rest). */
static void every_damage_is_handled(void **state)
{
    (void)state;
    char text[sizeof posts];
    for (size_t i = 0; i < sizeof posts - 1; i++) {
        memcpy(text, posts, sizeof posts);
        text[i] = (char)(text[i] ^ 0x15);
        for (int cut = 0; cut < 2; cut++) {
            fw_posts list;
            char digest[FW_DIGEST_HEX];
            int32_t lift;
            const char *path = scratch_bytes("posts.json", text, cut == 1 ? i : sizeof posts - 1);
            fw_status status = fw_posts_read(path, &list, digest, &lift, NULL);
            assert_true(status == FW_OK || status == FW_INPUT);
            free(list.item);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(reads_every_key),       cmocka_unit_test(no_posts_and_no_digest_are_fine),
        cmocka_unit_test(refuses_bad_files),     cmocka_unit_test(refuses_what_is_no_posts_file),
        cmocka_unit_test(refuses_hostile_sizes), cmocka_unit_test(every_damage_is_handled),
    };
    return cmocka_run_group_tests(tests, scratch_make, clean);
}
