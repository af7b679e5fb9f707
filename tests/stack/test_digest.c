/* SHA-256 against the published examples, the stack digest against its own definition, and lists of
 * digests against sha256sum. */
#define _GNU_SOURCE

#include "stack/digest.h"
#include "stack/sums.h"
#include "workshop.h"

static void assert_hex(const uint8_t sha256[FW_SHA256], const char *expected)
{
    char hex[FW_SHA256_HEX];
    fw_sha256_hex(sha256, hex);
    assert_string_equal(hex, expected);
}

/* NIST, "Examples with Intermediate Values", SHA-256 (FIPS 180-4): "abc" and the 448-bit message;
 * the empty message from the CAVP short message vectors. */
static void test_published_examples(void **state)
{
    (void)state;
    uint8_t sha256[FW_SHA256];
    assert_int_equal(fw_sha256("abc", 3, sha256, NULL), FW_OK);
    assert_hex(sha256, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    const char *longer = "abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq";
    fw_hash *hash;
    assert_int_equal(fw_hash_open(&hash, NULL), FW_OK);
    assert_int_equal(fw_hash_add(hash, longer, 10, NULL), FW_OK);
    assert_int_equal(fw_hash_add(hash, longer + 10, strlen(longer) - 10, NULL), FW_OK);
    assert_int_equal(fw_hash_finish(hash, sha256, NULL), FW_OK);
    fw_hash_close(hash);
    assert_hex(sha256, "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1");
    assert_int_equal(fw_sha256(NULL, 0, sha256, NULL), FW_OK);
    assert_hex(sha256, "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
}

static void test_stack_digest_is_of_lines(void **state)
{
    (void)state;
    uint8_t layer[2][FW_SHA256], stack[FW_SHA256], expected[FW_SHA256];
    assert_int_equal(fw_sha256("one", 3, layer[0], NULL), FW_OK);
    assert_int_equal(fw_sha256("two", 3, layer[1], NULL), FW_OK);
    char first[FW_SHA256_HEX], second[FW_SHA256_HEX], text[256];
    fw_sha256_hex(layer[0], first);
    fw_sha256_hex(layer[1], second);
    snprintf(text, sizeof text, "%s 0\n%s 1\n", first, second);
    assert_int_equal(fw_sha256(text, strlen(text), expected, NULL), FW_OK);
    assert_int_equal(fw_sha256_of_stack((const uint8_t(*)[FW_SHA256])layer, 2, stack, NULL), FW_OK);
    assert_memory_equal(stack, expected, FW_SHA256);
}

static void add(fw_sums *sums, const char *path, const char *content)
{
    uint8_t sha256[FW_SHA256];
    assert_int_equal(fw_sha256(content, strlen(content), sha256, NULL), FW_OK);
    assert_int_equal(fw_sums_add(sums, path, sha256, NULL), FW_OK);
}

static void test_sums_are_sorted_and_read_by_sha256sum(void **state)
{
    (void)state;
    shop_folder("layers");
    shop_text("layers/2.png", "two");
    shop_text("b", "bee");
    fw_sums sums = {0}, back = {0};
    fw_bytes text = {0};
    add(&sums, "old/2.png", "two");
    add(&sums, "b", "bee");
    assert_int_equal(fw_sums_rename(&sums, "old", "layers", NULL), FW_OK);
    assert_int_equal(fw_sums_write(&sums, &text, NULL), FW_OK);
    shop_bytes("SHA256SUMS", text.data, text.size);
    char command[SHOP_PATH + 64];
    snprintf(command, sizeof command, "cd %s && sha256sum --strict --status -c SHA256SUMS", shop);
    assert_int_equal(system(command), 0);
    bool well_formed;
    assert_int_equal(fw_sums_read(text.data, text.size, &back, &well_formed, NULL), FW_OK);
    assert_true(well_formed);
    assert_int_equal(back.count, 2);
    assert_string_equal(back.sum[0].path, "b");
    assert_true(fw_sums_has(&back, "layers/2.png"));
    assert_false(fw_sums_has(&back, "layers"));
    assert_false(fw_sums_has(&back, "layers/2.pn"));
    assert_true(fw_sums_has_below(&back, "layers"));
    assert_false(fw_sums_has_below(&back, "layer"));
    assert_false(fw_sums_has_below(&back, "b"));
    fw_sums_free(&sums);
    fw_sums_free(&back);
    for (size_t size = 0; size < text.size; size++) { /* only whole lines are well formed */
        const bool whole = size == 0 || text.data[size - 1] == '\n';
        fw_bytes part = {0};
        assert_int_equal(fw_bytes_append(&part, text.data, size, "test", NULL), FW_OK);
        assert_int_equal(fw_sums_read(part.data, size, &back, &well_formed, NULL), FW_OK);
        assert_int_equal(well_formed, whole);
        fw_sums_free(&back);
        fw_bytes_free(&part);
    }
    fw_bytes_free(&text);
}

static void test_below_finds_a_folder_among_like_names(void **state)
{
    (void)state;
    fw_sums sums = {0};
    fw_bytes text = {0};
    add(&sums, "a/x", "");
    add(&sums, "a-b", "");
    add(&sums, "a.txt", "");
    assert_int_equal(fw_sums_write(&sums, &text, NULL), FW_OK); /* sorts */
    assert_true(fw_sums_has_below(&sums, "a"));
    assert_true(fw_sums_has(&sums, "a-b"));
    assert_true(fw_sums_has(&sums, "a.txt"));
    assert_false(fw_sums_has(&sums, "a"));
    fw_sums_free(&sums);
    fw_bytes_free(&text);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_published_examples),
        cmocka_unit_test(test_stack_digest_is_of_lines),
        SHOP_TEST(test_sums_are_sorted_and_read_by_sha256sum),
        cmocka_unit_test(test_below_finds_a_folder_among_like_names),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
