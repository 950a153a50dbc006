#!/usr/bin/env bash
# Runs a job inside one Slurm allocation: a Dask scheduler and rateloom itself beside this script, a worker a task.
#
#     sbatch --ntasks=8 --time=02:00:00 workflows/slurm/in-allocation.sh JOB [OPTION OF rateloom run]...
#
# The exit status is that of rateloom. Options to sbatch overrule the lines below. From the environment:
#     PYTHON                the Python that rateloom[cluster] is installed in
#                           (default: .venv/bin/python of the folder of submission, else python3)
#     RATELOOM_SHARED       a folder that all nodes see, for addresses and logs (default: the folder of submission)
#     RATELOOM_SCRATCH      a folder on each node (default: /tmp)
#     RATELOOM_INTERFACE    network interface to use, as `ip link` calls it (default: Dask chooses)
#     RATELOOM_ENCRYPT=no   plain tcp: whoever reaches the port can run programs in your name
#SBATCH --job-name=rateloom
#SBATCH --ntasks=4
#SBATCH --cpus-per-task=1
#SBATCH --mem-per-cpu=2G
#SBATCH --time=01:00:00
#SBATCH --signal=B:INT@60
set -euo pipefail
set -m # gives what runs in the background a process group of its own, and leaves it its SIGINT

[ "$#" -gt 0 ] && [ -n "${SLURM_JOB_ID:-}" ] || {
    echo "Use: sbatch [OPTION OF sbatch]... $0 JOB [OPTION OF rateloom run]..." >&2
    exit 2
}
submitted_from=${SLURM_SUBMIT_DIR:-$PWD}
python=${PYTHON:-$submitted_from/.venv/bin/python}
[ -n "${PYTHON:-}" ] || [ -x "$python" ] || python=python3
python=$(command -v "$python") && "$python" -c 'import distributed, rateloom' || {
    echo "Rateloom is not installed for ${python:-$PYTHON}: pip install 'rateloom[cluster]', or set PYTHON." >&2
    exit 2
}

folder=${RATELOOM_SHARED:-$submitted_from}/rateloom-slurm-$SLURM_JOB_ID
rm -rf "$folder" # of the same job, begun again by Slurm
mkdir -m 700 "$folder"
scheduler='' workers='' rateloom='' interrupted=''

end() { # end PID: ends a process group, kindly first
    [ -n "$1" ] || return 0
    kill -TERM -- "-$1" 2>/dev/null || return 0
    for _ in $(seq 100); do
        kill -0 -- "-$1" 2>/dev/null || return 0
        sleep 0.1
    done
    kill -KILL -- "-$1" 2>/dev/null || true
}

leave() {
    local status=$?
    trap - EXIT
    trap '' INT TERM
    rm -f "$folder/key.pem" "$folder/certificate.pem" "$folder/scheduler.json"
    end "$workers"
    end "$scheduler"
    if [ "$status" -le 1 ]; then
        rm -rf "$folder"
    else
        echo "What the scheduler and the workers said is in $folder" >&2
    fi
    exit "$status"
}
interrupt() { # by Slurm before the time is up, or by scancel
    interrupted=yes
    [ -n "$rateloom" ] || exit 130
    kill -INT -- "-$rateloom" 2>/dev/null || true
}
trap leave EXIT
trap interrupt INT TERM

if [ "${RATELOOM_ENCRYPT:-yes}" != no ]; then
    export DASK_DISTRIBUTED__COMM__DEFAULT_SCHEME=tls DASK_DISTRIBUTED__COMM__REQUIRE_ENCRYPTION=true
    if [ -z "${DASK_DISTRIBUTED__COMM__TLS__CA_FILE:-}" ]; then
        # A certificate that signs itself: whoever can read this folder's key, and nobody else, is let in.
        openssl req -x509 -newkey rsa:3072 -nodes -days 30 -subj "/CN=rateloom $SLURM_JOB_ID" \
            -keyout "$folder/key.pem" -out "$folder/certificate.pem" 2>"$folder/openssl.log"
        export DASK_DISTRIBUTED__COMM__TLS__CA_FILE="$folder/certificate.pem"
        for role in SCHEDULER WORKER CLIENT; do
            export "DASK_DISTRIBUTED__COMM__TLS__${role}__CERT=$folder/certificate.pem"
            export "DASK_DISTRIBUTED__COMM__TLS__${role}__KEY=$folder/key.pem"
        done
    fi
fi
interface=${RATELOOM_INTERFACE:+--interface=$RATELOOM_INTERFACE}

"$python" -m dask scheduler --scheduler-file "$folder/scheduler.json" --port 0 --no-dashboard \
    --dashboard-address 127.0.0.1:0 ${interface:+"$interface"} >"$folder/scheduler.log" 2>&1 &
scheduler=$!

# A quarter of the memory is left to the process that watches a worker, to the scheduler and to rateloom itself.
cores=${SLURM_CPUS_PER_TASK:-1}
memory=0
if [ -n "${SLURM_MEM_PER_CPU:-}" ]; then
    memory=$((SLURM_MEM_PER_CPU * cores * 3 / 4))MiB
fi
# --wait=0 and no kill on a bad exit: one lost worker does not take the others along.
srun --ntasks="${SLURM_NTASKS:-1}" --cpus-per-task="$cores" --export=ALL --wait=0 --kill-on-bad-exit=0 \
    "$python" -m dask worker --scheduler-file "$folder/scheduler.json" --nthreads 1 --nworkers 1 \
    --memory-limit "$memory" --no-dashboard --death-timeout 120 ${interface:+"$interface"} \
    --local-directory "${RATELOOM_SCRATCH:-/tmp}" >"$folder/workers.log" 2>&1 &
workers=$!

# The first worker may take minutes where many read Python from one file system.
address=$("$python" - "$folder/scheduler.json" <<'PYTHON'
import sys
from distributed import Client
with Client(scheduler_file=sys.argv[1], timeout=300, set_as_default=False) as client:
    client.wait_for_workers(1, timeout=300)
    print(client.scheduler.address)
PYTHON
) || {
    echo "No worker has started." >&2
    exit 2
}

"${python%/*}/rateloom" run "$@" --scheduler "$address" &
rateloom=$!
while :; do # an interruption ends a wait, not rateloom
    interrupted='' status=0
    wait "$rateloom" || status=$?
    [ -n "$interrupted" ] || break
done
exit "$status"
