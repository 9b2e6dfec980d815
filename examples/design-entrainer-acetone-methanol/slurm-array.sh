#!/usr/bin/env bash
# A search in eight parts as a Slurm array job: sbatch slurm-array.sh
# When all parts are done: groupsmith gather parts/* --out results/design
#SBATCH --job-name=groupsmith
#SBATCH --array=1-8
#SBATCH --cpus-per-task=8
#SBATCH --time=12:00:00
#SBATCH --signal=B:TERM@120
#SBATCH --requeue
set -euo pipefail
folder="parts/${SLURM_ARRAY_TASK_ID}"
resume=()
# a part that was stopped or lost its node goes on where it was
[ -e "${folder}/search.json" ] && resume=(--resume)
exec groupsmith assemble brief.toml --out "${folder}" \
    --part "${SLURM_ARRAY_TASK_ID}/8" --threads "${SLURM_CPUS_PER_TASK}" "${resume[@]}"
