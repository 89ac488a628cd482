#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# help.sh: version, help, unknown names, the grammar as a user meets it.
room=help
. "$(dirname "$0")/lib.sh"

version() { run --version; ended 0 && [ "$(cat out)" = "terrace 0.1.0" ] && err_empty; }
program_help() { run --help; ended 0 && out_has "check DESIGN" && out_has "analyze DESIGN DATA" && err_empty; }
check_help() { run check --help; ended 0 && out_has "Example" && out_has "  terrace check data_examples/" && out_has "--schema" && err_empty; }
analyze_help() { run analyze --help; ended 0 && out_has "Example" && out_has "  terrace analyze data_examples/" && out_has "--close LABEL…" && out_has "-o, --out DIR" && err_empty; }
nothing() { run; ended 2 && err_has "no command given" && out_empty; }
near_command() { run chekc d.json; ended 2 && err_has "unknown command 'chekc'; did you mean 'check'?" && out_empty; }
far_command() { run frobnicate; ended 2 && err_has "'terrace --help' lists the commands"; }
near_global() { run --versoin; ended 2 && err_has "did you mean --version?"; }
near_option() { run check --shcema; ended 2 && err_has "did you mean --schema?" && out_empty; }
unknown_and_help() { run check --help --bogus-thing; ended 2 && out_empty; }
later_commands() {
    local name
    for name in simulate gather replay compare calibrate tune document seal verify randomize; do
        run "$name" "$files/trial.json"
        ended 2 && err_has "does not have '$name' yet" && err_lines 1 && out_empty || return 1
    done
}
missing_arguments() { run analyze; ended 2 && err_has "missing argument DESIGN" && err_has "missing argument DATA" && err_lines 2; }
extra_argument() { run check a.json b.json; ended 2 && err_has "unexpected argument 'b.json'"; }
options_before_command() { run --quiet --seed 5 check "$files/trial.json"; ended 0 && out_empty && err_empty; }
after_two_dashes() { cp "$files/trial.json" ./--quiet; run check -- --quiet; ended 0 && out_has "Three strengths"; }
all_option_faults() { run analyze a b --seed=-1 --threads 0 --analysis x --force=1; err_has "--seed: '-1'" && err_has "--threads: '0'" && err_has "--analysis: 'x'" && err_has "--force takes no value" && err_has "a" && ended 2; }
wrong_isa() { TERRACE_ISA=neon run check "$files/trial.json"; ended 2 && err_has "TERRACE_ISA"; }
full_version() { "$TERRACE" --version >/dev/full 2>"$work/err"; status=$?; ended 4 && err_has "standard output"; }

try "--version" version
try "--help" program_help
try "check --help has a worked example" check_help
try "analyze --help has a worked example" analyze_help
try "no command" nothing
try "unknown command, near" near_command
try "unknown command, far" far_command
try "unknown option without command" near_global
try "unknown option, near" near_option
try "an unknown option is told also with --help" unknown_and_help
try "commands of later versions" later_commands
try "missing arguments, each on its line" missing_arguments
try "unexpected argument" extra_argument
try "options before the command" options_before_command
try "-- ends the options" after_two_dashes
try "all faults of options in one run" all_option_faults
try "an instruction set that does not exist" wrong_isa
try "standard output is full" full_version
exit $failed
