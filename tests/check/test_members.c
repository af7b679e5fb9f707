/* Which pixels are posts: pictures with known answers, and random layers against a dense map. */
#include "check/stage.h"

enum { WIDTH = 12, HEIGHT = 6 };

/* Digits are posts. */
static const char *const two_posts[HEIGHT] = {
    "............", //
    "..000.......", //
    "..00011.....", //
    "...0111..11.", //
    ".....1......", //
    "222.......22", //
};

static const char *const solid[HEIGHT] = {
    "############", //
    "............", //
    "...###.#####", //
    "############", //
    "......######", //
    "##.#######.#", //
};

static int32_t post_of(char c)
{
    return c >= '0' && c <= '9' ? c - '0' : -1;
}

static fw_member_runs members_of(const char *const *rows)
{
    fw_member_runs out = {.width = WIDTH, .height = HEIGHT};
    out.row = calloc(HEIGHT + 1, sizeof *out.row);
    out.run = calloc(WIDTH * HEIGHT, sizeof *out.run);
    assert_non_null(out.row);
    assert_non_null(out.run);
    out.row_capacity = HEIGHT + 1;
    out.run_capacity = WIDTH * HEIGHT;
    for (int32_t y = 0; y < HEIGHT; y++) {
        for (int32_t x = 0, end; x < WIDTH; x = end) {
            for (end = x + 1; end < WIDTH && rows[y][end] == rows[y][x];)
                end++;
            if (post_of(rows[y][x]) >= 0)
                out.run[out.count++] = (fw_member_run){x, end, post_of(rows[y][x])};
        }
        out.row[y + 1] = out.count;
    }
    return out;
}

static fw_runs runs_of(const char *const *rows)
{
    fw_runs out = {0};
    assert_int_equal(fw_runs_begin(&out, WIDTH, HEIGHT, NULL), FW_OK);
    for (int32_t y = 0; y < HEIGHT; y++)
        for (int32_t x = 0; x < WIDTH; x++)
            if (rows[y][x] != '.')
                assert_int_equal(fw_runs_push(&out, y, x, x + 1, NULL), FW_OK);
    fw_runs_finish(&out);
    return out;
}

static void knows_the_post_of_a_pixel(void **state)
{
    (void)state;
    fw_member_runs members = members_of(two_posts);
    for (int32_t y = 0; y < HEIGHT; y++)
        for (int32_t x = 0; x < WIDTH; x++)
            assert_int_equal(fw_members_at(&members, x, y), post_of(two_posts[y][x]));
    assert_int_equal(fw_members_at(&members, -1, 5), -1);
    assert_int_equal(fw_members_at(&members, WIDTH, 5), -1);
    fw_member_runs_free(&members);
}

static void within_keeps_what_lies_in_the_set(void **state)
{
    (void)state;
    fw_member_runs members = members_of(two_posts), out = {0};
    fw_runs set = runs_of(solid);
    for (int again = 0; again < 2; again++) { /* the arrays are reused */
        assert_int_equal(fw_members_within(&members, &set, &out, NULL), FW_OK);
        for (int32_t y = 0; y < HEIGHT; y++)
            for (int32_t x = 0; x < WIDTH; x++)
                assert_int_equal(fw_members_at(&out, x, y),
                                 solid[y][x] != '.' ? post_of(two_posts[y][x]) : -1);
        assert_int_equal(out.row[HEIGHT], out.count);
    }
    fw_members_clear(&out);
    assert_int_equal(out.count, 0);
    assert_int_equal(out.height, 0);
    fw_member_runs_free(&members);
    fw_member_runs_free(&out);
    fw_runs_free(&set);
}

static bool is_even(void *context, int32_t post)
{
    (void)context;
    return post % 2 == 0;
}

static void sets_of_all_of_some_and_of_one(void **state)
{
    (void)state;
    fw_member_runs members = members_of(two_posts);
    fw_runs all = {0}, even = {0}, one = {0}, none = {0};
    assert_int_equal(fw_members_set(&members, NULL, NULL, &all, NULL), FW_OK);
    assert_int_equal(fw_members_set(&members, is_even, NULL, &even, NULL), FW_OK);
    assert_int_equal(fw_members_of(&members, 1, &one, NULL), FW_OK);
    assert_int_equal(fw_members_of(&members, 9, &none, NULL), FW_OK);
    for (int32_t y = 0; y < HEIGHT; y++) {
        for (int32_t x = 0; x < WIDTH; x++) {
            const int32_t post = post_of(two_posts[y][x]);
            assert_int_equal(fw_runs_find(&all, x, y) != UINT32_MAX, post >= 0);
            assert_int_equal(fw_runs_find(&even, x, y) != UINT32_MAX, post >= 0 && post % 2 == 0);
            assert_int_equal(fw_runs_find(&one, x, y) != UINT32_MAX, post == 1);
        }
    }
    assert_true(fw_runs_valid(&all)); /* posts that touch become one run */
    assert_int_equal(none.count, 0);
    fw_member_runs_free(&members);
    fw_runs_free(&all);
    fw_runs_free(&even);
    fw_runs_free(&one);
    fw_runs_free(&none);
}

/* Post 0 and post 1 share a region; post 1 and post 2 stand in two regions each. */
static void pieces_by_region_and_post(void **state)
{
    (void)state;
    static const fw_member_piece expected[5] = {
        {0, 0, 7}, {0, 1, 6}, {1, 1, 2}, {2, 2, 3}, {3, 2, 2}};
    fw_member_runs members = members_of(two_posts);
    fw_runs set = runs_of(two_posts);
    fw_regions regions = {0};
    fw_member_pieces pieces = {0};
    assert_int_equal(fw_regions_label(&set, FW_FOUR, &regions, NULL), FW_OK);
    assert_int_equal(regions.count, 4);
    assert_int_equal(fw_members_pieces(&members, &set, &regions, &pieces, NULL), FW_OK);
    assert_int_equal(pieces.count, 5);
    for (int i = 0; i < 5; i++) {
        assert_int_equal(pieces.item[i].region, expected[i].region);
        assert_int_equal(pieces.item[i].post, expected[i].post);
        assert_int_equal(pieces.item[i].pixels, expected[i].pixels);
    }
    free(pieces.item);
    fw_member_runs_free(&members);
    fw_runs_free(&set);
    fw_regions_free(&regions);
}

static char pick(uint64_t *seed, const char *from)
{
    *seed ^= *seed >> 12;
    *seed ^= *seed << 25;
    *seed ^= *seed >> 27;
    return from[(uint32_t)((*seed * UINT64_C(2685821657736338717)) >> 32) % strlen(from)];
}

static void random_layers_against_a_map(void **state)
{
    (void)state;
    uint64_t seed = 88172645463325252ULL;
    for (int run = 0; run < 200; run++) {
        char posts[HEIGHT][WIDTH], film[HEIGHT][WIDTH];
        const char *post_rows[HEIGHT], *film_rows[HEIGHT];
        int64_t expected = 0;
        for (int y = 0; y < HEIGHT; y++) {
            for (int x = 0; x < WIDTH; x++) {
                posts[y][x] = pick(&seed, "...0012");
                film[y][x] = pick(&seed, "..###");
                expected += posts[y][x] != '.' && film[y][x] != '.';
            }
            post_rows[y] = posts[y];
            film_rows[y] = film[y];
        }
        fw_member_runs members = members_of(post_rows), out = {0};
        fw_runs set = runs_of(film_rows);
        fw_regions regions = {0};
        fw_member_pieces pieces = {0};
        assert_int_equal(fw_members_within(&members, &set, &out, NULL), FW_OK);
        assert_int_equal(fw_regions_label(&set, FW_FOUR, &regions, NULL), FW_OK);
        assert_int_equal(fw_members_pieces(&out, &set, &regions, &pieces, NULL), FW_OK);
        for (int32_t y = 0; y < HEIGHT; y++)
            for (int32_t x = 0; x < WIDTH; x++)
                assert_int_equal(fw_members_at(&out, x, y),
                                 film[y][x] != '.' ? post_of(posts[y][x]) : -1);
        for (size_t i = 0; i < pieces.count; i++) {
            const fw_member_piece *p = &pieces.item[i];
            expected -= p->pixels;
            if (i > 0)
                assert_true(p[-1].region < p->region ||
                            (p[-1].region == p->region && p[-1].post < p->post));
        }
        assert_int_equal(expected, 0);
        free(pieces.item);
        fw_member_runs_free(&members);
        fw_member_runs_free(&out);
        fw_runs_free(&set);
        fw_regions_free(&regions);
    }
}

static void push_claim(fw_member_runs *list, int32_t x, int32_t post)
{
    fw_member_run *last =
        list->count > list->row[list->open_row] ? &list->run[list->count - 1] : NULL;
    if (last != NULL && last->x1 == x && last->post == post)
        last->x1++;
    else
        list->run[list->count++] = (fw_member_run){x, x + 1, post};
}

/* Random claims of five posts on the same pixels: the pairs against a count of pixels. */
static void pairs_are_what_two_posts_claim(void **state)
{
    (void)state;
    enum { POSTS = 5 };
    uint64_t seed = 7;
    for (int round = 0; round < 50; round++) {
        int32_t from[HEIGHT][POSTS], to[HEIGHT][POSTS];
        fw_member_runs owned = {.width = WIDTH, .height = HEIGHT}, lost = owned;
        for (int k = 0; k < 2; k++) {
            fw_member_runs *list = k == 0 ? &owned : &lost;
            list->row = calloc(HEIGHT + 1, sizeof *list->row);
            list->run = calloc(WIDTH * HEIGHT * POSTS, sizeof *list->run);
            assert_non_null(list->row);
            assert_non_null(list->run);
        }
        for (int32_t y = 0; y < HEIGHT; y++) {
            owned.open_row = lost.open_row = y;
            for (int p = 0; p < POSTS; p++) {
                seed = seed * UINT64_C(6364136223846793005) + 1442695040888963407; /* Knuth MMIX */
                from[y][p] = (int32_t)(seed >> 33) % WIDTH;
                to[y][p] = from[y][p] + (int32_t)(seed >> 50) % 6;
            }
            for (int32_t x = 0; x < WIDTH; x++)
                for (int p = 0, owner = -1; p < POSTS; p++) {
                    if (x < from[y][p] || x >= to[y][p])
                        continue;
                    push_claim(owner < 0 ? &owned : &lost, x, p);
                    owner = p;
                }
            owned.row[y + 1] = owned.count;
            lost.row[y + 1] = lost.count;
        }
        fw_member_pairs pairs = {0};
        assert_int_equal(fw_members_pairs(&owned, &lost, &pairs, NULL), FW_OK);
        size_t next = 0;
        for (int a = 0; a < POSTS; a++)
            for (int b = a + 1; b < POSTS; b++) {
                int64_t both = 0;
                for (int32_t y = 0; y < HEIGHT; y++)
                    for (int32_t x = 0; x < WIDTH; x++)
                        both += x >= from[y][a] && x < to[y][a] && x >= from[y][b] && x < to[y][b];
                if (both == 0)
                    continue;
                assert_true(next < pairs.count);
                assert_int_equal(pairs.item[next].a, a);
                assert_int_equal(pairs.item[next].b, b);
                assert_int_equal(pairs.item[next++].pixels, both);
            }
        assert_int_equal(next, pairs.count);
        free(pairs.item);
        fw_member_runs_free(&owned);
        fw_member_runs_free(&lost);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(knows_the_post_of_a_pixel),
                                       cmocka_unit_test(within_keeps_what_lies_in_the_set),
                                       cmocka_unit_test(sets_of_all_of_some_and_of_one),
                                       cmocka_unit_test(pieces_by_region_and_post),
                                       cmocka_unit_test(random_layers_against_a_map),
                                       cmocka_unit_test(pairs_are_what_two_posts_claim)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
