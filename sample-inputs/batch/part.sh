#!/bin/bash
# One part of a survey: a task of a job array. Started by check-in-parts.sh, which sets DATASET, PARTS, FOLDER and VISVET.
#
# Safe to kill, requeue and start again: a part gets its name when it is whole, and one that is whole is not made again.
#SBATCH --job-name=visvet-part
#SBATCH --requeue
#SBATCH --open-mode=append

set -euo pipefail

# exec: signals of the scheduler reach the program itself.
exec ${VISVET:-visvet} part "$DATASET" --index "$SLURM_ARRAY_TASK_ID" --of "$PARTS" \
  --out "$FOLDER/$SLURM_ARRAY_TASK_ID.part" --jobs "${SLURM_CPUS_PER_TASK:-1}" ${MEMORY:+--memory "$MEMORY"}
