/* Which files of a folder are layers, their order, and every refusal. */
#define _GNU_SOURCE

#include "stack/folder.h"
#include "stack/layer_names.h"
#include "workshop.h"

static void touch(const char *const *name)
{
    for (; *name != NULL; name++)
        shop_text(*name, *name);
}

static void refuse(const char *path, const char *names, fw_status expected, const char *words)
{
    fw_stack *stack;
    fw_fault fault = {0};
    const fw_status status = fw_stack_open(path, names, &stack, &fault);
    assert_fault(status, &fault, expected, words);
    assert_null(stack);
}

static void test_natural_order_from_any_number(void **state)
{
    (void)state;
    touch((const char *[]){"l_11.png", "l_9.png", "l_10.png", "readme.txt", "cover.png",
                           ".l_12.png", NULL});
    fw_stack *stack;
    assert_int_equal(fw_stack_open(shop, NULL, &stack, NULL), FW_OK);
    assert_int_equal(fw_stack_count(stack), 3);
    assert_string_equal(fw_stack_name(stack, 0), "l_9.png");
    assert_string_equal(fw_stack_name(stack, 1), "l_10.png");
    assert_string_equal(fw_stack_name(stack, 2), "l_11.png");
    assert_string_equal(fw_stack_label(stack, 2), shop_path("l_11.png"));
    assert_string_equal(fw_stack_path(stack), shop);
    char name[FW_NAME_SIZE];
    assert_int_equal(fw_stack_output_name(stack, 0, name, NULL), FW_OK);
    assert_string_equal(name, "l_9.png");
    assert_int_equal(fw_stack_output_name(stack, 100, name, NULL), FW_OK);
    assert_string_equal(name, "l_109.png");
    fw_stack_close(stack);
}

static void test_output_names_keep_prefix_digits_and_suffix(void **state)
{
    (void)state;
    touch((const char *[]){"a2 00098 x.png", "a2 00099 x.png", "a2 00100 x.png", NULL});
    fw_stack *stack;
    assert_int_equal(fw_stack_open(shop, "a2 ##### x.png", &stack, NULL), FW_OK);
    char name[FW_NAME_SIZE];
    assert_int_equal(fw_stack_output_name(stack, 7, name, NULL), FW_OK);
    assert_string_equal(name, "a2 00105 x.png");
    assert_int_equal(fw_stack_output_name(stack, 100000, name, NULL), FW_OK);
    assert_string_equal(name, "a2 100098 x.png");
    fw_stack_close(stack);
}

static void test_a_name_that_would_grow_too_long_is_refused(void **state)
{
    (void)state;
    char name[FW_NAME_SIZE];
    memset(name, 'a', 250);
    strcpy(name + 250, "9.png");
    touch((const char *[]){name, NULL});
    fw_stack *stack;
    fw_fault fault = {0};
    assert_int_equal(fw_stack_open(shop, "", &stack, NULL), FW_OK);
    assert_int_equal(fw_stack_output_name(stack, 0, name, &fault), FW_OK);
    assert_fault(fw_stack_output_name(stack, 1, name, &fault), &fault, FW_INPUT, "too long");
    fw_stack_close(stack);
}

static void test_a_pattern_picks_the_layers(void **state)
{
    (void)state;
    touch((const char *[]){"layer_0001.png", "layer_0002.png", "view_0001.png", "layer_x.png",
                           "layer_.png", "layer_0003.png.bak", NULL});
    fw_stack *stack;
    assert_int_equal(fw_stack_open(shop, "layer_####.png", &stack, NULL), FW_OK);
    assert_int_equal(fw_stack_count(stack), 2);
    fw_stack_close(stack);
    refuse(shop, NULL, FW_INPUT, "two kinds of names, layer_0001.png and view_0001.png");
    refuse(shop, "slice_#.png", FW_INPUT, "no layers");
    refuse(shop, "layer.png", FW_INPUT, "bad pattern");
    refuse(shop, "#_#.png", FW_INPUT, "bad pattern");
    refuse(shop, "a/#.png", FW_INPUT, "bad pattern");
}

static void test_gaps_and_duplicates_name_the_files(void **state)
{
    (void)state;
    touch((const char *[]){"1.png", "2.png", "4.png", NULL});
    refuse(shop, NULL, FW_INPUT, "missing layer number 3, between 2.png and 4.png");
    touch((const char *[]){"3.png", "03.png", NULL});
    refuse(shop, NULL, FW_INPUT, "layer number 3 twice, 03.png and 3.png");
}

static void test_folders_that_are_no_stack(void **state)
{
    (void)state;
    refuse(shop, NULL, FW_INPUT, "no layers");
    refuse(shop_path("absent"), NULL, FW_INPUT, "does not exist");
    shop_text("file", "x");
    refuse(shop_path("file"), NULL, FW_INPUT, "not a folder");
    touch((const char *[]){"a\n1.png", NULL});
    refuse(shop, NULL, FW_INPUT, "control characters");
}

static void test_only_plain_files_are_read(void **state)
{
    (void)state;
    shop_text("target", "hello");
    assert_int_equal(symlink("target", shop_path("1.png")), 0);
    assert_int_equal(mkfifo(shop_path("2.png"), 0600), 0);
    shop_folder("3.png");
    assert_int_equal(symlink("nowhere", shop_path("4.png")), 0);
    assert_int_equal(symlink("5.png", shop_path("5.png")), 0);
    shop_text("6.png", "");
    fw_stack *stack;
    fw_bytes bytes = {0};
    fw_fault fault = {0};
    assert_int_equal(fw_stack_open(shop, NULL, &stack, NULL), FW_OK);
    size_t size;
    assert_int_equal(fw_stack_size(stack, 0, &size, NULL), FW_OK);
    assert_int_equal(size, 5);
    assert_int_equal(fw_stack_read(stack, 0, &bytes, NULL), FW_OK);
    assert_int_equal(bytes.size, 5);
    assert_memory_equal(bytes.data, "hello", 5);
    assert_fault(fw_stack_read(stack, 1, &bytes, &fault), &fault, FW_INPUT, "not a plain file");
    assert_fault(fw_stack_size(stack, 1, &size, &fault), &fault, FW_INPUT, "not a plain file");
    assert_fault(fw_stack_read(stack, 2, &bytes, &fault), &fault, FW_INPUT, "not a plain file");
    assert_fault(fw_stack_read(stack, 3, &bytes, &fault), &fault, FW_INPUT, "does not exist");
    assert_fault(fw_stack_read(stack, 4, &bytes, &fault), &fault, FW_INPUT, "a link to itself");
    assert_int_equal(fw_stack_read(stack, 5, &bytes, NULL), FW_OK);
    assert_int_equal(bytes.size, 0);
    fw_bytes_free(&bytes);
    fw_stack_close(stack);
}

static void test_a_huge_file_is_refused_before_it_is_read(void **state)
{
    (void)state;
    shop_text("1.png", "");
    assert_int_equal(truncate(shop_path("1.png"), (off_t)FW_FILE_LIMIT + 1), 0);
    fw_stack *stack;
    fw_bytes bytes = {0};
    fw_fault fault = {0};
    assert_int_equal(fw_stack_open(shop, NULL, &stack, NULL), FW_OK);
    assert_fault(fw_stack_read(stack, 0, &bytes, &fault), &fault, FW_INPUT, "too large");
    assert_int_equal(bytes.capacity, 0);
    fw_stack_close(stack);
}

static void test_names_are_taken_apart(void **state)
{
    (void)state;
    static const struct {
        const char *pattern, *name;
        long long number; /* -1 = no match */
    } table[] = {
        {NULL, "a1b22c.png", 22},
        {NULL, "7.PNG", 7},
        {NULL, "a.png", -1},
        {NULL, "1.jpg", -1},
        {NULL, ".png", -1},
        {NULL, "png", -1},
        {NULL, "999999999999999999.png", 999999999999999999},
        {NULL, "9999999999999999999.png", -1},
        {"x#", "x5", 5},
        {"#x", "5x", 5},
        {"x##y", "xy", -1},
        {"x##y", "x-1y", -1},
        {"aa#aa", "aaa", -1},
        {"1#1", "1231", 23},
    };
    for (size_t i = 0; i < sizeof table / sizeof *table; i++) {
        fw_name_pattern pattern;
        fw_layer_name parts;
        assert_int_equal(fw_name_pattern_read(table[i].pattern, &pattern, NULL), FW_OK);
        const bool found = fw_layer_name_read(&pattern, table[i].name, &parts);
        assert_int_equal(found, table[i].number >= 0);
        if (found)
            assert_true(parts.number == table[i].number);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        SHOP_TEST(test_natural_order_from_any_number),
        SHOP_TEST(test_output_names_keep_prefix_digits_and_suffix),
        SHOP_TEST(test_a_name_that_would_grow_too_long_is_refused),
        SHOP_TEST(test_a_pattern_picks_the_layers),
        SHOP_TEST(test_gaps_and_duplicates_name_the_files),
        SHOP_TEST(test_folders_that_are_no_stack),
        SHOP_TEST(test_only_plain_files_are_read),
        SHOP_TEST(test_a_huge_file_is_refused_before_it_is_read),
        cmocka_unit_test(test_names_are_taken_apart),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
