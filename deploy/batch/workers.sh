#!/usr/bin/env bash
# Workers as a job array of a batch scheduler: every task is one `windrow worker` that ends with its allocation.
#
# Submit from the top folder:  sbatch deploy/batch/workers.sh   or   qsub deploy/batch/workers.sh
#
# Environment, all optional:
#   WORKER_ENVIRONMENT  file of NAME=value lines with DATABASE_URL and REDIS_URL, readable by its owner only
#                       (default ~/.config/windrow/environment); secrets stay out of this script and of the scheduler's records
#   WORKER_PROGRAM      windrow's executable (default: the build beside this script's folder)
#   WORKER_GRACE        seconds that running jobs get when the scheduler sends SIGTERM (default 90)
# Processors and memory are those the scheduler gave; half of the memory is for evaluations, shared by the threads.
#
# Exit status: the worker's; 2 where the environment file is missing or open to others.
#
#SBATCH --job-name=windrow
#SBATCH --array=1-8
#SBATCH --ntasks=1
#SBATCH --cpus-per-task=8
#SBATCH --mem=10G
#SBATCH --time=04:00:00
#SBATCH --signal=B:TERM@120
#SBATCH --requeue
#PBS -N windrow
#PBS -J 1-8
#PBS -l select=1:ncpus=8:mem=10gb
#PBS -l walltime=04:00:00
#PBS -r y
set -euo pipefail

refuse() {
  printf 'windrow: %s\n' "$1" >&2
  exit 2
}

# Schedulers run a copy of this script from a folder of their own, but tell where it was submitted.
submitted=${SLURM_SUBMIT_DIR:-${PBS_O_WORKDIR:-$PWD}}
program=${WORKER_PROGRAM:-$submitted/dist/src/cli/main.js}
[ -f "$program" ] || refuse "no program at $program: submit from the top folder after \`npm run build\`, or set WORKER_PROGRAM"

file=${WORKER_ENVIRONMENT:-$HOME/.config/windrow/environment}
[ -r "$file" ] || refuse "no environment file at $file; see deploy/README.md"
# Links are followed: what counts is who may read the file itself.
if [ -n "$(find -L "$file" -prune \( -perm -g=r -o -perm -g=w -o -perm -o=r -o -perm -o=w \))" ]; then refuse "$file is open to others: chmod 600 $file"; fi
# Lines are taken as they are, never run.
while IFS= read -r line || [ -n "$line" ]; do
  case $line in '' | '#'*) continue ;; esac
  [[ $line =~ ^[A-Z_][A-Z0-9_]*= ]] || refuse "$file holds a line that is not NAME=value"
  export "${line?}"
done <"$file"

threads=${SLURM_CPUS_PER_TASK:-${NCPUS:-}}
mebibytes=${SLURM_MEM_PER_NODE:-}
if [ -z "$mebibytes" ] && [ -n "${SLURM_MEM_PER_CPU:-}" ]; then mebibytes=$((SLURM_MEM_PER_CPU * ${threads:-1})); fi
[ -z "$threads" ] || export WINDROW_THREADS=$threads
# Otherwise windrow takes half of what the machine or its control group allows.
if [ -n "$threads" ] && [ -n "$mebibytes" ]; then export WINDROW_MEMORY=$((mebibytes / 2 / threads))M; fi
export WINDROW_GRACE=${WORKER_GRACE:-90}

# In place of this shell, so that the scheduler's SIGTERM reaches the worker.
exec node "$program" worker
