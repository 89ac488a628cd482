#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# designs.sh DIR: small designs and data for the golden runs, every curve x endpoint, written to DIR.
set -eu
dir=$1
levels='{"label":"P","value":0},{"label":"A","value":5},{"label":"B","value":10},{"label":"C","value":20},{"label":"D","value":40}'

design() { # NAME CURVE TYPE MORE-OF-MODEL MORE-OF-DESIGN
    local range='' targets='"MED":{"rule":"minimum_effect","effect":0.1}'
    [ "$3" = continuous ] && range=',"range":[-10,10]' && targets='"MED":{"rule":"minimum_effect","effect":1}'
    cat >"$dir/$1.json" <<END
{"terrace":1,"title":"golden $1","levels":{"control":"P","list":[$levels]},
 "endpoint":{"name":"y","type":"$3","better":"higher"$range},
 "model":{"curve":"$2"$4},"targets":{"ED90":{"rule":"effective_dose","fraction":0.9},$targets,
 "near":{"rule":"within_margin","margin":0.1},"best":{"rule":"optimal"}},
 "allocation":{"adapt":{"target":"ED90","power":0.5,"information":0.5,"drop_below":0.02}},
 "subjects":200,"analyses":{"at":[20]},
 "decisions":[{"action":"stop_success","if":{"measure":"pr_gain","target":"ED90","above":0.99}},
  {"action":"stop_futility","if":{"measure":"predictive_next","target":"ED90","per_arm":100,"alpha":0.025,"below":0.2}}],
 "seed":42${5:-}}
END
}

# responses from a small congruential generator: the same everywhere
data() { # NAME SUBJECTS-A-LEVEL BINARY
    awk -v n="$2" -v binary="$3" 'BEGIN {
        split("P A B C D", label, " "); print "subject,level,response"
        for (k = 1; k <= 5; k++) for (i = 1; i <= n; i++) {
            s = (s * 1103 + 12345 + k) % 65536
            u = s / 65536
            y = binary ? (u < 0.15 + 0.13 * k ? 1 : 0) : int((u * 6 + k - 4) * 100) / 100
            printf "%d-%d,%s,%s\n", k, i, label[k], y
        } }' </dev/null >"$dir/$1.csv"
}

for curve in linear log_linear quadratic emax sigmoid_emax logistic exponential ndlm independent; do
    design "$curve-continuous" $curve continuous ''
    design "$curve-binary" $curve binary ''
done
design ndlm_actual-continuous ndlm continuous ',"spacing":"actual"'
priors='"theta":{"student_t":{"df":4,"location":0,"scale":2}},"slope":{"normal":{"mean":0,"sd":2,"above":-1}}'
for type in continuous binary; do
    design "ndlm_second-$type" ndlm $type ',"order":2'
    design "ndlm_priors-$type" ndlm $type ",\"order\":2,\"priors\":{$priors,\"drift_variance\":{\"inverse_gamma\":{\"shape\":2,\"scale\":0.5}}}"
    design "emax_priors-$type" emax $type ',"priors":{"Emax":{"uniform":{"min":-1,"max":8}},"ED50":{"gamma":{"shape":2,"rate":0.1,"below":60}}}'
done
for type in continuous binary; do
    design "sensitivity-$type" quadratic $type '' ',"sensitivity":[{"curve":"linear"},{"curve":"ndlm","order":2}]'
done
data continuous 12 0
data binary 12 1
data sparse-continuous 2 0
data sparse-binary 2 1
