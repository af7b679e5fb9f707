/* Writes the example files that check_schema.py validates: write_examples FOLDER. */
#include "report/example_report.h"

#include "report/posts_write.h"
#include "report/report_write.h"

typedef fw_status writer(const fw_report *report, fw_sink sink, fw_fault *fault);

static fw_status to_file(void *context, const char *bytes, size_t count, fw_fault *fault)
{
    if (fwrite(bytes, 1, count, context) != count)
        return fw_fault_set(fault, FW_MACHINE, "example: cannot be written");
    return FW_OK;
}

static int write_one(const char *folder, const char *name, const fw_report *report, writer *write)
{
    char path[512];
    fw_fault fault = {0};
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *file = fopen(path, "wb");
    if (file == NULL) {
        perror(path);
        return 1;
    }
    fw_status status = write(report, (fw_sink){to_file, file}, &fault);
    if (fclose(file) != 0 || status != FW_OK) {
        fprintf(stderr, "%s: %s\n", path, fault.text);
        return 1;
    }
    return 0;
}

int main(int count, char **argument)
{
    static example full, bare;
    if (count != 2) {
        fputs("usage: write_examples FOLDER\n", stderr);
        return 2;
    }
    example_make(&full);
    example_make_bare(&bare);
    return write_one(argument[1], "report-full.json", &full.report, fw_report_write) ||
           write_one(argument[1], "report-bare.json", &bare.report, fw_report_write) ||
           write_one(argument[1], "posts-full.json", &full.report, fw_posts_write) ||
           write_one(argument[1], "posts-bare.json", &bare.report, fw_posts_write);
}
