/* Every rule of the output folder: where it may go, that it appears whole or not at all, that it
 * never destroys what is not ours. */
#define _GNU_SOURCE

#include "stack/output.h"
#include "workshop.h"

#include <signal.h>
#include <sys/file.h>
#include <sys/mount.h>
#include <sys/resource.h>
#include <sys/syscall.h>
#include <sys/wait.h>

/* Stands before the C library's: lets a test play a file system that knows no flags, or one where
 * somebody makes the folder at the last moment. */
static bool refuse_flags;
static const char *make_first;

int renameat2(int from_folder, const char *from, int to_folder, const char *to, unsigned flags);
int renameat2(int from_folder, const char *from, int to_folder, const char *to, unsigned flags)
{
    if (make_first != NULL)
        shop_folder(make_first);
    make_first = NULL;
    if (refuse_flags && flags != 0) {
        errno = EINVAL;
        return -1;
    }
    return (int)syscall(SYS_renameat2, from_folder, from, to_folder, to, flags);
}

static const char mark[] = "{ \"version\": 1,\n \"format\" : \"falsework-report/1\" }\n";

/* Rules with paths in the scratch folder. */
static fw_output_rules rules_for(const char *out, const char *stack)
{
    return (fw_output_rules){.path = shop_path(out),
                             .stack = stack != NULL ? shop_path(stack) : NULL};
}

static void refuse_rules(const fw_output_rules *rules, fw_status expected, const char *words)
{
    fw_output *output;
    fw_fault fault = {0};
    assert_fault(fw_output_check(rules, &fault), &fault, expected, words);
    assert_fault(fw_output_begin(rules, &output, &fault), &fault, expected, words);
    assert_null(output);
}

static void refuse(const char *out, const char *stack, const char *words)
{
    fw_output_rules rules = rules_for(out, stack);
    refuse_rules(&rules, FW_INPUT, words);
    rules.replace = true; /* no licence to destroy the input either */
    refuse_rules(&rules, FW_INPUT, words);
}

static void make_stack(const char *folder)
{
    char name[64];
    shop_folder(folder);
    for (int i = 1; i <= 3; i++) {
        snprintf(name, sizeof name, "%s/%d.png", folder, i);
        shop_text(name, name);
    }
}

static fw_output *begin(const char *out, bool replace)
{
    fw_output_rules rules = rules_for(out, NULL);
    rules.replace = replace;
    fw_output *output;
    fw_fault fault = {0};
    const fw_status status = fw_output_begin(&rules, &output, &fault);
    if (status != FW_OK)
        print_message("%s\n", fault.text);
    assert_int_equal(status, FW_OK);
    return output;
}

/* An output like that of a run, with a text that tells runs apart. */
static void fill(fw_output *output, const char *text)
{
    assert_int_equal(fw_output_folder(output, "layers", NULL), FW_OK);
    assert_int_equal(fw_output_write(output, "layers/1.png", text, strlen(text), NULL, NULL),
                     FW_OK);
    assert_int_equal(fw_output_write(output, "report.json", mark, strlen(mark), NULL, NULL), FW_OK);
}

static void make_output(const char *out, const char *text, bool replace)
{
    fw_output *output = begin(out, replace);
    fw_fault fault = {0};
    fill(output, text);
    const fw_status status = fw_output_publish(output, &fault);
    if (status != FW_OK)
        print_message("%s\n", fault.text);
    assert_int_equal(status, FW_OK);
    fw_output_close(output);
}

static void assert_content(const char *name, const char *expected)
{
    char text[1024] = "";
    FILE *file = fopen(shop_path(name), "rb");
    assert_non_null(file);
    text[fread(text, 1, sizeof text - 1, file)] = '\0';
    fclose(file);
    assert_string_equal(text, expected);
}

static int sums_hold(const char *folder, const char *list)
{
    char command[2 * SHOP_PATH];
    snprintf(command, sizeof command, "cd %s && sha256sum --strict --status -c %s",
             shop_path(folder), list);
    return system(command);
}

static void test_stack_cannot_be_hit(void **state)
{
    (void)state;
    shop_folder("home");
    make_stack("home/stack");
    shop_folder("home/stack/inner");
    assert_int_equal(symlink("home/stack", shop_path("link")), 0);
    assert_int_equal(symlink("home", shop_path("homelink")), 0);
    refuse("home/stack", "home/stack", "is the stack itself");
    refuse("home/stack/", "home/stack", "is the stack itself");
    refuse("link", "home/stack", "is the stack itself");
    refuse("home/stack", "link", "is the stack itself");
    refuse("home/../home/stack", "link", "is the stack itself");
    refuse("home/stack/new", "home/stack", "inside the stack");
    refuse("link/new", "home/stack", "inside the stack");
    refuse("home/stack/inner/new", "link", "inside the stack");
    refuse("home/stack/inner", "home/stack", "inside the stack");
    refuse("home", "home/stack", "holds the stack");
    refuse("homelink", "home/stack", "holds the stack");
    refuse("home", "link", "holds the stack");
    shop_text("home/stack.zip", "z");
    refuse("home/stack.zip", "home/stack.zip", "is the stack itself");
    refuse("home", "home/stack.zip", "holds the stack");
    assert_int_equal(shop_count("home/stack"), 4);
    assert_int_equal(shop_count("."), 3);
    fw_output_rules rules = rules_for("new", "absent");
    refuse_rules(&rules, FW_INPUT, "cannot open the stack");
}

static void test_current_and_protected_folders_cannot_be_hit(void **state)
{
    (void)state;
    shop_folder("work");
    shop_folder("work/deep");
    shop_folder("jobs");
    shop_text("jobs/job.yaml", "");
    assert_int_equal(symlink("../jobs/job.yaml", shop_path("work/job.yaml")), 0);
    char before[SHOP_PATH];
    assert_non_null(getcwd(before, sizeof before));
    assert_int_equal(chdir(shop_path("work/deep")), 0);
    refuse("work/deep", NULL, "current folder");
    refuse("work", NULL, "current folder");
    fw_output_rules rules = {.path = "../deep"};
    refuse_rules(&rules, FW_INPUT, "current folder");
    rules.path = "..";
    refuse_rules(&rules, FW_INPUT, "unusable output name");
    assert_int_equal(chdir(before), 0);
    const char *const protect[] = {shop_path("work/job.yaml"), shop_path("absent/x.yaml")};
    rules = (fw_output_rules){shop_path("jobs"), NULL, protect, 2, true};
    refuse_rules(&rules, FW_INPUT, "folder of");
    rules.path = shop_path("work");
    refuse_rules(&rules, FW_INPUT, "folder of");
    rules.path = shop;
    refuse_rules(&rules, FW_INPUT, "folder of");
    rules.path = shop_path("jobs/new");
    assert_int_equal(fw_output_check(&rules, NULL), FW_OK);
}

static void test_names_and_parents(void **state)
{
    (void)state;
    static const char *const name[] = {"", "/", ".", "..", "a/..", "a/."};
    fw_output_rules rules = {0};
    for (size_t i = 0; i < sizeof name / sizeof *name; i++) {
        rules.path = name[i];
        refuse_rules(&rules, FW_INPUT, "unusable output name");
    }
    char longest[300] = "";
    memset(longest, 'a', 243);
    rules = rules_for(longest, NULL);
    refuse_rules(&rules, FW_INPUT, "unusable output name");
    rules = rules_for("absent/new", NULL);
    refuse_rules(&rules, FW_INPUT, "does not exist");
    shop_text("file", "");
    rules = rules_for("file/new", NULL);
    refuse_rules(&rules, FW_INPUT, "not a folder");
    longest[242] = '\0';
    make_output(longest, "x", false);
    assert_true(shop_exists(longest));
}

static void test_unwritable_parent(void **state)
{
    (void)state;
    shop_folder("locked");
    assert_int_equal(chmod(shop, 0755), 0);
    assert_int_equal(chmod(shop_path("locked"), 0555), 0);
    const bool root = geteuid() == 0;
    if (root)
        assert_int_equal(seteuid(65534), 0);
    fw_output_rules rules = rules_for("locked/new", NULL);
    fw_fault fault = {0};
    fw_output *output;
    const fw_status check = fw_output_check(&rules, &fault);
    const fw_status start = fw_output_begin(&rules, &output, NULL);
    if (root)
        assert_int_equal(seteuid(0), 0);
    assert_fault(check, &fault, FW_MACHINE, "no permission");
    assert_int_equal(start, FW_MACHINE);
    assert_int_equal(shop_count("locked"), 0);
    assert_int_equal(chmod(shop_path("locked"), 0755), 0);
}

static void test_mount_points_are_refused(void **state)
{
    (void)state;
    fw_output_rules rules = {.path = "/proc", .replace = true};
    refuse_rules(&rules, FW_INPUT, "mount point");
    rules.replace = false;
    refuse_rules(&rules, FW_INPUT, "name a folder inside it");
    shop_folder("mount");
    shop_folder("source");
    if (mount(shop_path("source"), shop_path("mount"), NULL, MS_BIND, NULL) != 0)
        return;                      /* needs privileges; the case above is there for everybody */
    rules.path = shop_path("mount"); /* the same device on both sides */
    fw_fault fault = {0};
    const fw_status status = fw_output_check(&rules, &fault);
    assert_int_equal(umount(shop_path("mount")), 0);
    assert_fault(status, &fault, FW_INPUT, "mount point");
}

static void test_whatever_exists_is_refused(void **state)
{
    (void)state;
    shop_folder("empty");
    shop_text("file", "");
    assert_int_equal(symlink("nowhere", shop_path("dangling")), 0);
    assert_int_equal(symlink("empty", shop_path("link")), 0);
    static const char *const name[] = {"empty", "file", "dangling", "link", "empty/", "link/"};
    for (size_t i = 0; i < sizeof name / sizeof *name; i++) {
        fw_output_rules rules = rules_for(name[i], NULL);
        refuse_rules(&rules, FW_INPUT, "exists");
    }
    fw_output_rules rules = rules_for("link", NULL);
    rules.replace = true;
    refuse_rules(&rules, FW_INPUT, "not a folder");
    rules = rules_for("file", NULL);
    rules.replace = true;
    refuse_rules(&rules, FW_INPUT, "not a folder");
    assert_int_equal(shop_count("."), 4);
}

static void test_an_output_appears_whole(void **state)
{
    (void)state;
    make_stack("stack");
    fw_stack *stack;
    assert_int_equal(fw_stack_open(shop_path("stack"), NULL, &stack, NULL), FW_OK);
    uint8_t sha256[3][FW_SHA256], digest[FW_SHA256];
    for (int32_t i = 0; i < 3; i++) {
        fw_bytes bytes = {0};
        assert_int_equal(fw_stack_read(stack, i, &bytes, NULL), FW_OK);
        assert_int_equal(fw_sha256(bytes.data, bytes.size, sha256[i], NULL), FW_OK);
        fw_bytes_free(&bytes);
    }
    const mode_t mask = umask(022);
    fw_output *output = begin("out", false);
    fill(output, "new layer");
    assert_int_equal(fw_output_copy(output, "layers/2.png", stack, 1, sha256[1], NULL), FW_OK);
    assert_int_equal(fw_output_write(output, "a.txt", "abc", 3, digest, NULL), FW_OK);
    assert_int_equal(digest[0], 0xba); /* FIPS 180-4's example */
    assert_int_equal(fw_output_rename(output, "layers", "refused", NULL), FW_OK);
    assert_int_equal(fw_output_input_sums(output, stack, (const uint8_t(*)[FW_SHA256])sha256, NULL),
                     FW_OK);
    assert_false(shop_exists("out"));
    assert_int_equal(shop_count("."), 2);
    assert_int_equal(strncmp(fw_output_staging(output), shop_path(".out.part-"),
                             strlen(shop_path(".out.part-"))),
                     0);
    assert_int_equal(fw_output_publish(output, NULL), FW_OK);
    fw_output_close(output);
    umask(mask);
    assert_int_equal(shop_count("."), 2);
    assert_int_equal(shop_count("out"), 5);
    assert_content("out/refused/1.png", "new layer");
    assert_content("out/refused/2.png", "stack/2.png");
    assert_int_equal(sums_hold("out", "SHA256SUMS"), 0);
    assert_int_equal(sums_hold("stack", "../out/INPUT-SHA256SUMS"), 0);
    struct stat info;
    assert_int_equal(stat(shop_path("out"), &info), 0);
    assert_int_equal(info.st_mode & 0777, 0755);
    assert_int_equal(stat(shop_path("out/a.txt"), &info), 0);
    assert_int_equal(info.st_mode & 0777, 0644);
    fw_stack_close(stack);
}

static void test_a_file_in_pieces(void **state)
{
    (void)state;
    fw_output *output = begin("out", false);
    fw_bytes whole = {0};
    assert_int_equal(fw_output_open_file(output, "report.json", NULL), FW_OK);
    for (uint32_t i = 0; i < 300; i++) {
        static uint8_t piece[2000];
        const size_t size = shop_random(sizeof piece);
        memset(piece, (int)i, size);
        assert_int_equal(fw_output_append(output, piece, size, NULL), FW_OK);
        assert_int_equal(fw_bytes_append(&whole, piece, size, "test", NULL), FW_OK);
    }
    assert_int_equal(fw_output_finish_file(output, NULL), FW_OK);
    assert_int_equal(fw_output_open_file(output, "none", NULL), FW_OK);
    assert_int_equal(fw_output_finish_file(output, NULL), FW_OK);
    assert_int_equal(fw_output_publish(output, NULL), FW_OK);
    fw_output_close(output);
    assert_int_equal(sums_hold("out", "SHA256SUMS"), 0);
    FILE *file = fopen(shop_path("out/report.json"), "rb");
    uint8_t *back = malloc(whole.size + 1);
    assert_int_equal(fread(back, 1, whole.size + 1, file), whole.size);
    assert_memory_equal(back, whole.data, whole.size);
    fclose(file);
    free(back);
    fw_bytes_free(&whole);
}

static void test_failed_writes_are_faults(void **state)
{
    (void)state;
    fw_output *output = begin("out", false);
    fw_fault fault = {0};
    assert_int_equal(fw_output_write(output, "a", "x", 1, NULL, NULL), FW_OK);
    assert_int_equal(fw_output_write(output, "a", "x", 1, NULL, NULL), FW_MACHINE);
    assert_int_equal(fw_output_open_file(output, "a", NULL), FW_MACHINE);
    static const uint8_t bytes[200000];
    struct rlimit kept, small;
    getrlimit(RLIMIT_FSIZE, &kept);
    small = (struct rlimit){1000, kept.rlim_max}; /* stands for a full disk */
    signal(SIGXFSZ, SIG_IGN);
    setrlimit(RLIMIT_FSIZE, &small);
    const fw_status whole = fw_output_write(output, "b", bytes, sizeof bytes, NULL, &fault);
    assert_int_equal(fw_output_open_file(output, "c", NULL), FW_OK);
    const fw_status piece = fw_output_append(output, bytes, sizeof bytes, NULL);
    const fw_status end = fw_output_finish_file(output, NULL);
    setrlimit(RLIMIT_FSIZE, &kept);
    assert_fault(whole, &fault, FW_MACHINE, "the disk is full");
    assert_int_equal(piece, FW_MACHINE);
    assert_int_equal(end, FW_MACHINE);
    fw_output_close(output);
    assert_int_equal(shop_count("."), 0);
}

static void test_a_stack_that_changes_is_noticed(void **state)
{
    (void)state;
    make_stack("stack");
    fw_stack *stack;
    fw_fault fault = {0};
    uint8_t sha256[FW_SHA256];
    assert_int_equal(fw_stack_open(shop_path("stack"), NULL, &stack, NULL), FW_OK);
    assert_int_equal(fw_sha256("stack/1.png", 11, sha256, NULL), FW_OK);
    fw_output *output = begin("out", false);
    assert_int_equal(fw_output_copy(output, "1", stack, 0, sha256, NULL), FW_OK);
    shop_text("stack/1.png", "stack/2.png");
    fw_status status = fw_output_copy(output, "2", stack, 0, sha256, &fault);
    assert_fault(status, &fault, FW_INPUT, "stack/1.png");
    assert_fault(status, &fault, FW_INPUT, "changed during the work");
    fw_output_close(output);
    fw_stack_close(stack);
    assert_int_equal(shop_count("."), 1);
}

static void test_nothing_is_left_of_an_output_that_is_given_up(void **state)
{
    (void)state;
    fw_output *output = begin("out", false);
    fill(output, "x");
    assert_int_equal(fw_output_open_file(output, "half", NULL), FW_OK);
    assert_int_equal(fw_output_append(output, "x", 1, NULL), FW_OK);
    assert_int_equal(shop_count("."), 1);
    fw_output_close(output);
    fw_output_close(NULL);
    assert_int_equal(shop_count("."), 0);
}

static void test_the_name_taken_meanwhile(void **state)
{
    (void)state;
    for (int i = 0; i < 2; i++) {
        refuse_flags = i == 1;
        fw_output *output = begin("out", false);
        fill(output, "x");
        fw_fault fault = {0};
        if (refuse_flags)
            shop_folder("out");
        else
            make_first = "out"; /* between the last look and the rename */
        assert_fault(fw_output_publish(output, &fault), &fault, FW_INPUT, "meanwhile");
        fw_output_close(output);
        assert_int_equal(shop_count("."), 1);
        assert_int_equal(shop_count("out"), 0);
        assert_int_equal(rmdir(shop_path("out")), 0);
    }
    make_output("out", "x", false); /* still without flags */
    assert_content("out/layers/1.png", "x");
    refuse_flags = false;
}

static void test_replace(void **state)
{
    (void)state;
    make_output("out", "one", true); /* nothing there yet */
    for (int i = 0; i < 2; i++) {
        refuse_flags = i == 1;
        fw_output_rules rules = rules_for("out", NULL);
        refuse_rules(&rules, FW_INPUT, "add --replace");
        make_output("out", i == 0 ? "two" : "three", true);
        assert_content("out/layers/1.png", i == 0 ? "two" : "three");
        assert_int_equal(sums_hold("out", "SHA256SUMS"), 0);
        assert_int_equal(shop_count("."), 1);
    }
    refuse_flags = false;
    fw_output *output = begin("out", true); /* given up: the old one stays */
    fill(output, "four");
    fw_output_close(output);
    assert_content("out/layers/1.png", "three");
    assert_int_equal(shop_count("."), 1);
    output = begin("out", true); /* the old one goes away meanwhile */
    fill(output, "five");
    assert_int_equal(rename(shop_path("out"), shop_path("elsewhere")), 0);
    assert_int_equal(fw_output_publish(output, NULL), FW_OK);
    fw_output_close(output);
    assert_content("out/layers/1.png", "five");
    assert_int_equal(shop_count("."), 2);
}

static void refuse_replace(const char *words)
{
    fw_output_rules rules = rules_for("out", NULL);
    rules.replace = true;
    refuse_rules(&rules, FW_INPUT, words);
}

static void test_replace_spares_strangers(void **state)
{
    (void)state;
    shop_folder("out");
    refuse_replace("not an earlier output");
    shop_text("out/report.json", "{\"format\": \"other\", \"x\": \"falsework-report/1\"}");
    refuse_replace("report.json of ours");
    shop_text("out/report.json", mark);
    refuse_replace("no SHA256SUMS");
    shop_text("out/SHA256SUMS", "what\n");
    refuse_replace("SHA256SUMS that is not ours");
    assert_int_equal(nftw(shop_path("out"), shop_remove_one, 16, FTW_DEPTH | FTW_PHYS), 0);

    make_output("out", "ours", false);
    shop_text("out/notes.txt", "precious");
    refuse_replace("notes.txt");
    assert_int_equal(unlink(shop_path("out/notes.txt")), 0);
    shop_text("out/layers/extra.png", "precious");
    refuse_replace("layers/extra.png");
    assert_int_equal(unlink(shop_path("out/layers/extra.png")), 0);
    shop_folder("out/photos");
    refuse_replace("photos");
    assert_int_equal(rmdir(shop_path("out/photos")), 0);
    assert_int_equal(symlink("layers", shop_path("out/link")), 0);
    refuse_replace("link");
    assert_int_equal(unlink(shop_path("out/link")), 0);
    assert_int_equal(unlink(shop_path("out/layers/1.png")), 0);
    assert_int_equal(symlink("/etc/passwd", shop_path("out/layers/1.png")), 0);
    refuse_replace("layers/1.png"); /* listed, but a link now */
    assert_int_equal(unlink(shop_path("out/layers/1.png")), 0);
    assert_int_equal(rmdir(shop_path("out/layers")), 0);
    make_output("out", "what is listed may be missing", true);
}

static void test_a_stranger_that_comes_during_the_work(void **state)
{
    (void)state;
    make_output("out", "old", false);
    fw_output *output = begin("out", true);
    fw_fault fault = {0};
    fill(output, "new");
    shop_text("out/notes.txt", "precious");
    assert_fault(fw_output_publish(output, &fault), &fault, FW_INPUT, "notes.txt");
    fw_output_close(output);
    assert_content("out/notes.txt", "precious");
    assert_content("out/layers/1.png", "old");
    assert_int_equal(shop_count("."), 1);
}

/* A child makes a staging folder and dies by SIGKILL. */
static void leave_stale(const char *out)
{
    const pid_t child = fork();
    if (child == 0) {
        fw_output_rules rules = rules_for(out, NULL);
        fw_output *output;
        if (fw_output_begin(&rules, &output, NULL) == FW_OK &&
            fw_output_folder(output, "layers", NULL) == FW_OK &&
            fw_output_write(output, "layers/1.png", "x", 1, NULL, NULL) == FW_OK)
            raise(SIGKILL);
        _exit(1);
    }
    int how;
    assert_int_equal(waitpid(child, &how, 0), child);
    assert_true(WIFSIGNALED(how));
}

static void test_what_a_killed_run_left_is_removed(void **state)
{
    (void)state;
    leave_stale("out");
    assert_int_equal(shop_count("."), 1);
    shop_folder(".out.part-aaaaaa"); /* died before it had a lock */
    shop_folder(".out.part-bbbbbb"); /* not ours: no lock file, and not empty */
    shop_text(".out.part-bbbbbb/precious", "");
    shop_folder(".other.part-aaaaaa");
    shop_folder(".out.part-aaaaaaa");
    shop_text(".out.part-cccccc", "a file");
    assert_int_equal(symlink("elsewhere", shop_path(".out.part-dddddd")), 0);
    shop_folder("elsewhere");
    shop_text("elsewhere/SHA256SUMS", "");
    fw_output *living = begin("out", false);
    assert_int_equal(shop_count("."), 7);
    assert_false(shop_exists(".out.part-aaaaaa"));
    assert_true(shop_exists("elsewhere/SHA256SUMS"));
    fw_output *second = begin("out", false); /* does not touch the one that lives */
    fill(second, "second");
    fill(living, "first");
    assert_int_equal(fw_output_publish(living, NULL), FW_OK);
    fw_fault fault = {0};
    assert_fault(fw_output_publish(second, &fault), &fault, FW_INPUT, "meanwhile");
    fw_output_close(second);
    fw_output_close(living);
    assert_content("out/layers/1.png", "first");
    assert_int_equal(shop_count("."), 7);
}

/* Killed in the middle of deleting: the list of digests goes last, so the rest is still ours. */
static void test_a_removal_cut_short_is_resumed(void **state)
{
    (void)state;
    make_output(".out.part-aaaaaa", "old", false);
    assert_int_equal(unlink(shop_path(".out.part-aaaaaa/layers/1.png")), 0);
    assert_int_equal(unlink(shop_path(".out.part-aaaaaa/report.json")), 0);
    make_output("out", "new", false);
    assert_int_equal(shop_count("."), 1);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        SHOP_TEST(test_stack_cannot_be_hit),
        SHOP_TEST(test_current_and_protected_folders_cannot_be_hit),
        SHOP_TEST(test_names_and_parents),
        SHOP_TEST(test_unwritable_parent),
        SHOP_TEST(test_mount_points_are_refused),
        SHOP_TEST(test_whatever_exists_is_refused),
        SHOP_TEST(test_an_output_appears_whole),
        SHOP_TEST(test_a_file_in_pieces),
        SHOP_TEST(test_failed_writes_are_faults),
        SHOP_TEST(test_a_stack_that_changes_is_noticed),
        SHOP_TEST(test_nothing_is_left_of_an_output_that_is_given_up),
        SHOP_TEST(test_the_name_taken_meanwhile),
        SHOP_TEST(test_replace),
        SHOP_TEST(test_replace_spares_strangers),
        SHOP_TEST(test_a_stranger_that_comes_during_the_work),
        SHOP_TEST(test_what_a_killed_run_left_is_removed),
        SHOP_TEST(test_a_removal_cut_short_is_resumed),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
