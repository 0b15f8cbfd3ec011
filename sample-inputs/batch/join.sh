#!/bin/bash
# The judgement of all parts together. Started by check-in-parts.sh when every part is there.
#
# A caution or a hold is a result and no failure of the job: the verdict stands in the reports and in the job's log.
#SBATCH --job-name=visvet-join
#SBATCH --requeue
#SBATCH --open-mode=append

set -uo pipefail

${VISVET:-visvet} join "$FOLDER"/*.part --out "$FOLDER" --quiet --jobs "${SLURM_CPUS_PER_TASK:-1}" \
  ${PLAN:+--plan "$PLAN"}
status=$?
if [ "$status" -gt 1 ]; then exit "$status"; fi
