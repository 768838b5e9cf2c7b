# shellcheck shell=bash
# Environment of everything that starts ranks here; sourced by scripts/* and run/*. What the user has set stands.

root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd -P)
export PATH="$root/.venv/bin:$PATH"

# One thread a rank: four ranks with two threads each on two cores ran 26 times slower.
export OPENBLAS_NUM_THREADS="${OPENBLAS_NUM_THREADS:-1}"
export OMP_NUM_THREADS="${OMP_NUM_THREADS:-1}"

# Open MPI refuses root, which is who one is in most containers.
if [ "$(id -u)" = 0 ]; then
    export OMPI_ALLOW_RUN_AS_ROOT="${OMPI_ALLOW_RUN_AS_ROOT:-1}" OMPI_ALLOW_RUN_AS_ROOT_CONFIRM="${OMPI_ALLOW_RUN_AS_ROOT_CONFIRM:-1}"
fi

# launch RANKS COMMAND...: run a command under mpiexec on this machine.
# More ranks than cores are allowed (same as --oversubscribe) and then give way while they wait. Ranks are not bound to
# cores: two jobs side by side would be bound to the same ones. Names: Open MPI 4 | Open MPI 5 (PRRTE).
# SIGTERM, Ctrl-C: mpiexec itself would kill its ranks one second later and return 1. SIGUSR1 it hands on to them, so that
# a run saves its state in its own time and says so in its exit code; that is what a first signal becomes here. A second
# one reaches mpiexec as SIGTERM. In a session of its own mpiexec hears of Ctrl-C from here only.
launch() {
    local ranks=$1 job code asked=0 before own=""
    shift
    export OMPI_MCA_rmaps_base_oversubscribe="${OMPI_MCA_rmaps_base_oversubscribe:-1}"
    export OMPI_MCA_hwloc_base_binding_policy="${OMPI_MCA_hwloc_base_binding_policy:-none}"
    export PRTE_MCA_rmaps_default_mapping_policy="${PRTE_MCA_rmaps_default_mapping_policy:-:oversubscribe}"
    export PRTE_MCA_hwloc_default_binding_policy="${PRTE_MCA_hwloc_default_binding_policy:-none}"
    if [ "$ranks" -gt "$(nproc)" ]; then
        export OMPI_MCA_mpi_yield_when_idle="${OMPI_MCA_mpi_yield_when_idle:-1}"
    fi
    case $- in *m*) mpiexec -n "$ranks" "$@"; return ;; esac # a shell with job control has its own ways
    [ -z "$(command -v setsid)" ] || own=setsid
    $own mpiexec -n "$ranks" "$@" </dev/null &
    job=$!
    trap 'asked=$((asked + 1)); if [ "$asked" = 1 ]; then kill -USR1 "$job"; else kill -TERM "$job"; fi' INT TERM HUP USR1
    while :; do
        before=$asked code=0
        wait "$job" || code=$?
        [ "$asked" != "$before" ] || break # a signal ends `wait` early
    done
    trap - INT TERM HUP USR1
    return "$code"
}
