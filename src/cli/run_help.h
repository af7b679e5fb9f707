/* The lines of --help that the passes share. */
#ifndef FW_CLI_RUN_HELP_H
#define FW_CLI_RUN_HELP_H

#define FW_RUN_HELP                                                                                \
    "  --json          report.json to stdout instead of the summary\n"                             \
    "  --threads N     as many as the machine has, unless said\n"                                  \
    "  --batch N       layers taken at a time (16)\n"                                              \
    "  --memo-mib N    memory for peel solutions that recur (96)\n"                                \
    "  --store-mib N   memory for packed layers; beyond it a nameless file (96)\n"                 \
    "  --verbose       on stderr: files decoded, and where the time went\n"

#endif
