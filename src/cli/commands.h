/* The commands, one file each. */
#ifndef FW_CLI_COMMANDS_H
#define FW_CLI_COMMANDS_H

#include "cli/arguments.h"

extern const fw_command fw_command_begin;
extern const fw_command fw_command_survey;
extern const fw_command fw_command_prop;
extern const fw_command fw_command_recheck;
extern const fw_command fw_command_prove;

#endif
