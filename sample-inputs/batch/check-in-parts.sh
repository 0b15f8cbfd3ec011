#!/bin/bash
# Check a dataset in parts on a Slurm cluster: a job array, one task a part, and a job that joins them.
#
#   check-in-parts.sh DATASET PARTS FOLDER [options of sbatch, for both jobs]
#
#   DATASET   a file, a folder or a quoted glob, in a place that every node sees
#   PARTS     how many
#   FOLDER    for the parts, the logs and the reports; made where it is not there
#
# From the environment: VISVET, the program (default: visvet); PLAN, a plan file; MEMORY, as for --memory of every part.
# Prints the ids of both jobs.
set -euo pipefail

if [ $# -lt 3 ]; then
  sed -n '2,11s/^# \{0,1\}//p' "$0" >&2
  exit 2
fi
here=$(cd "$(dirname "$0")" && pwd)
dataset=$1
parts=$2
folder=$3
shift 3
mkdir -p "$folder"

# Jobs begin in another folder.
case $dataset in /*) ;; *) dataset=$PWD/$dataset ;; esac
folder=$(cd "$folder" && pwd)
case ${PLAN:=} in '' | /*) ;; *) PLAN=$PWD/$PLAN ;; esac
export DATASET=$dataset PARTS=$parts FOLDER=$folder PLAN VISVET=${VISVET:-visvet} MEMORY=${MEMORY:-}

array=$(sbatch --parsable --array="0-$((parts - 1))" --output="$folder/part-%a.log" "$@" "$here/part.sh")
# afterok: every task of the array, requeued ones too, ended well.
join=$(sbatch --parsable --dependency="afterok:${array%%;*}" --kill-on-invalid-dep=yes \
  --output="$folder/join.log" "$@" "$here/join.sh")
echo "parts ${array%%;*}"
echo "join ${join%%;*}"
