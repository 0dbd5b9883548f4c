#!/bin/sh
# An overnight search as a Slurm job array, one part a task, in one run folder on a shared disk:
#
#   sbatch overnight-slurm.sh DESIGN RUN --starts 5000
#   drawtube gather RUN
#
# A part that meets the time limit leaves with status 75 and is queued again. A part that gather
# lists as missing is submitted alone: sbatch --array=3 overnight-slurm.sh …
# PARTS is the size of the whole array. DRAWTUBE names the program, if it is not on the path.
#SBATCH --job-name=overnight
#SBATCH --array=1-16
#SBATCH --cpus-per-task=1
#SBATCH --time=04:10:00
#SBATCH --requeue
#SBATCH --open-mode=append
set -u
design=$1 run=$2
shift 2
status=0
"${DRAWTUBE:-drawtube}" overnight "$design" --run "$run" --part "auto/${PARTS:-16}" \
  --threads "${SLURM_CPUS_PER_TASK:-1}" --time-limit 240 --progress plain "$@" || status=$?
if [ "$status" -eq 75 ]; then
  scontrol requeue "${SLURM_ARRAY_JOB_ID}_${SLURM_ARRAY_TASK_ID}"
fi
exit "$status"
