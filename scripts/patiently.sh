# shellcheck shell=bash
# Long work that says how it is doing; sourced by scripts/install and scripts/build-petsc, which set `speaker`.

say() { echo "${speaker:-install}: $*" >&2; }

fail() {
    say "$*"
    exit 3
}

span() { if [ "$1" -lt 60 ]; then echo "$1 s"; else echo "$(($1 / 60)) min $(($1 % 60)) s"; fi; }

# patiently TITLE SECONDS LOG COMMAND...: run a command into a log file, with a line now and every 30 s.
# SECONDS: how long it takes on two free cores. Returns 3 after the telling lines of the log when the command fails. The
# command is a process group of its own, so that it ends with us when we are stopped.
patiently() {
    local title=$1 usual=$2 log=$3 begin=$SECONDS spoken=0 pid
    shift 3
    mkdir -p "$(dirname "$log")"
    say "$title: $(span "$usual") on two free cores; log: $log"
    set -m
    "$@" >"$log" 2>&1 </dev/null &
    pid=$!
    set +m
    # shellcheck disable=SC2064
    trap "kill -TERM -- -$pid 2>/dev/null; say 'stopped; the next call goes on'; exit 130" INT TERM HUP
    while kill -0 "$pid" 2>/dev/null; do
        sleep 0.2
        if [ $((SECONDS - begin)) -ge $((spoken + 30)) ]; then
            spoken=$((SECONDS - begin))
            say "$title: $(span "$spoken") so far, $(span "$usual") on two free cores"
        fi
    done
    trap - INT TERM HUP
    if ! wait "$pid"; then
        say "$title failed after $(span $((SECONDS - begin))); from $log:"
        # What pip and Python say about it afterwards hides the cause.
        sed '/Traceback (most recent call last)/,$d; /subprocess-exited-with-error/,$d' "$log" | tail -n 15 | cut -c 1-200 | sed 's/^/    /' >&2
        return 3
    fi
}
