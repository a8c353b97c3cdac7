#!/usr/bin/env bash
# Runs the two workflows of this folder on a small simulated folder of recordings, and compares
# what they make, byte for byte, with one plain run of `beadwell batch`:
#
#     docs/pipelines/try.sh            both
#     docs/pipelines/try.sh slurm      the Slurm job array alone
#     docs/pipelines/try.sh snakemake  the Snakemake workflow alone
#
# The Slurm is a throw-away one: munged, slurmctld and two slurmd on this machine, that listen
# on the loopback address alone, run as the user who calls this, and keep all of their files in
# a temporary folder. All of them are stopped at the end, also after a failure.
#
# Needs Go, and of Debian: slurm-wlm munge snakemake (apt-get install slurm-wlm munge snakemake).
set -euo pipefail

which=${1:-both}
case $which in
both | slurm | snakemake) ;;
*)
	echo "usage: $0 [both|slurm|snakemake]" >&2
	exit 2
	;;
esac
here=$(cd "$(dirname "$0")" && pwd)
PATH=$PATH:/usr/sbin:/sbin # the daemons

need() {
	local missing=()
	for program in "$@"; do
		command -v "$program" >/dev/null || missing+=("$program")
	done
	if [ ${#missing[@]} -gt 0 ]; then
		echo "$0: not found: ${missing[*]} (Debian: apt-get install slurm-wlm munge snakemake)" >&2
		exit 1
	fi
}
need go timeout
[ "$which" = snakemake ] || need munged slurmctld slurmd sbatch srun scontrol sinfo squeue pgrep
[ "$which" = slurm ] || need snakemake

work=$(mktemp -d "${TMPDIR:-/tmp}/beadwell-pipelines.XXXXXX")
started=()

# Ends what was started, and nothing else: politely, then after five seconds for certain.
finish() {
	local status=$? pid
	trap - EXIT INT TERM
	if [ "$status" -ne 0 ]; then
		echo "== failed with status $status; the ends of the logs:" >&2
		for log in "$work"/slurm/*.log "$work"/*.log; do
			[ -s "$log" ] && printf -- '-- %s\n' "${log##*/}" >&2 && tail -n 25 "$log" >&2
		done
	fi
	for pid in "${started[@]}"; do
		kill "$pid" 2>/dev/null || true
	done
	for _ in $(seq 50); do
		alive=0
		for pid in "${started[@]}"; do
			if kill -0 "$pid" 2>/dev/null; then alive=1; fi
		done
		[ "$alive" = 0 ] && break
		sleep 0.1
	done
	for pid in "${started[@]}"; do
		kill -9 "$pid" 2>/dev/null || true
	done
	rm -rf "$work"
	exit "$status"
}
trap finish EXIT
trap 'exit 130' INT
trap 'exit 143' TERM

step() { printf '\n== %s\n' "$*"; }

# Waits until a command succeeds, for so many seconds.
await() {
	local seconds=$1 what=$2
	shift 2
	for _ in $(seq $((seconds * 5))); do
		"$@" >/dev/null 2>&1 && return
		sleep 0.2
	done
	echo "$0: $what: not within $seconds s" >&2
	return 1
}

# Runs a command that may end with one of the statuses in the first argument.
ends_with() {
	local allowed=$1 status=0
	shift
	"$@" || status=$?
	case " $allowed " in
	*" $status "*) ;;
	*)
		echo "$0: $*: exit status $status, not one of: $allowed" >&2
		return 1
		;;
	esac
}

compare() {
	diff -r "$work/plain" "$2"
	echo "$1: $(find "$2" -type f | wc -l) files, $(cd "$2" && find . -type f -exec cat {} + | wc -c) bytes, the same as those of the plain run"
}

step "a folder of simulated recordings"
(cd "$here/../.." && go build -o "$work/bin/beadwell" ./cmd/beadwell)
export PATH="$work/bin:$PATH"
cd "$work"
mkdir tonight
cat >tonight/session.toml <<'END'
[bead]
diameter = "1.00(2) um"

[medium]
fluid = "water"
temperature = "24.0(5) C"

[chamber]
height = "10.0(5) um"

[recording]
exposure = "0 s"
noise = "0 nm"
END
echo 'file,power' >tonight/tracks.csv
for run in 1 2 3 4 5 6; do
	power=$((20 * run))
	beadwell simulate --stiffness "$((8 * run)) pN/um" --diameter '1.00 um' --temperature '24 C' --height '10 um' \
		--rate '2 kHz' --exposure '0 s' --duration '4 s' --seed "$run" --unit nm --out "tonight/run$run.csv" >/dev/null
	echo "run$run.csv,$power mW" >>tonight/tracks.csv
done
# One whose bead was not the one of the session, and one that broke off in the middle of a number.
beadwell simulate --stiffness '30 pN/um' --diameter '3.00 um' --temperature '24 C' --height '10 um' \
	--rate '2 kHz' --exposure '0 s' --duration '4 s' --seed 7 --unit nm --out tonight/run10.csv >/dev/null
head -c 20000 tonight/run1.csv | sed '$s/.*/1.234,oops,5/' >tonight/broken.csv
rm -f tonight/*.truth.json
ls -l tonight

step "the plain run"
ends_with 5 beadwell batch --quiet --out plain tonight 2>plain.log
cat plain.log

if [ "$which" != slurm ]; then
	step "the Snakemake workflow"
	snakemake --version
	ends_with 0 timeout 120 snakemake --snakefile "$here/Snakefile" --cores 2 --config recordings=tonight \
		results=by-snakemake >snakemake.log 2>&1
	grep -E '^(calibrate|collect|total) |steps \(' snakemake.log
	compare Snakemake by-snakemake

	step "Snakemake again: nothing to do; then one recording touched, and one job for it"
	timeout 60 snakemake --snakefile "$here/Snakefile" --cores 2 --config recordings=tonight \
		results=by-snakemake 2>&1 | grep -i 'nothing to be done'
	touch tonight/run3.csv
	timeout 60 snakemake --snakefile "$here/Snakefile" --cores 2 --config recordings=tonight \
		results=by-snakemake >snakemake.log 2>&1
	grep -E '^(calibrate|collect|total) ' snakemake.log
	grep -qE '^calibrate +1 ' snakemake.log
	compare Snakemake by-snakemake
fi

if [ "$which" != snakemake ]; then
	step "a Slurm of two nodes on this machine"
	chmod 711 "$work" # munged wants its socket to be within everybody's reach
	mkdir -m 711 slurm
	user=$(id -un)
	# Four ports in a row that nobody listens on.
	free() { ! (exec 3<>"/dev/tcp/127.0.0.1/$1") 2>/dev/null; }
	for _ in $(seq 50); do
		port=$((20000 + RANDOM % 10000))
		free "$port" && free $((port + 1)) && free $((port + 2)) && free $((port + 3)) && break
	done
	(umask 077 && head -c 128 /dev/urandom >slurm/munge.key)
	cat >slurm/slurm.conf <<END
ClusterName=beadwell
SlurmctldHost=$(hostname -s)(127.0.0.1)
SlurmctldPort=$port
SlurmUser=$user
SlurmdUser=$user
AuthType=auth/munge
AuthInfo=socket=$work/slurm/munge.socket
CommunicationParameters=NoInAddrAny,NoCtldInAddrAny
ProctrackType=proctrack/pgid
TaskPlugin=task/none
JobAcctGatherType=jobacct_gather/none
AccountingStorageType=accounting_storage/none
MpiDefault=none
KillWait=2
ReturnToService=2
SchedulerType=sched/backfill
SelectType=select/cons_tres
SelectTypeParameters=CR_Core
StateSaveLocation=$work/slurm/state
SlurmdSpoolDir=$work/slurm/spool-%n
SlurmctldPidFile=$work/slurm/slurmctld.pid
SlurmdPidFile=$work/slurm/slurmd-%n.pid
SlurmdParameters=config_overrides
NodeName=bench1 NodeHostname=$(hostname -s) NodeAddr=127.0.0.1 Port=$((port + 1)) CPUs=1 State=UNKNOWN
NodeName=bench2 NodeHostname=$(hostname -s) NodeAddr=127.0.0.1 Port=$((port + 2)) CPUs=1 State=UNKNOWN
PartitionName=all Nodes=bench[1-2] Default=YES MaxTime=5 State=UP
END
	# No control groups: Slurm 23 has a word for that; before, it is the plugin that does nothing until it is asked.
	case $(slurmd -V) in
	*' '1?.* | *' '20.* | *' '21.* | *' '22.*) echo 'CgroupPlugin=cgroup/v1' ;;
	*) echo 'CgroupPlugin=disabled' ;;
	esac >slurm/cgroup.conf
	mkdir -m 700 slurm/state slurm/spool-bench1 slurm/spool-bench2
	export SLURM_CONF=$work/slurm/slurm.conf
	munged --foreground --key-file="$work/slurm/munge.key" --socket="$work/slurm/munge.socket" \
		--pid-file="$work/slurm/munged.pid" --seed-file="$work/slurm/munged.seed" \
		>slurm/munged.log 2>&1 &
	started+=($!)
	await 10 munged test -S slurm/munge.socket
	slurmctld -D -f "$SLURM_CONF" >slurm/slurmctld.log 2>&1 &
	started+=($!)
	for node in bench1 bench2; do
		slurmd -D -N "$node" -f "$SLURM_CONF" >"slurm/slurmd-$node.log" 2>&1 &
		started+=($!)
	done
	both_idle() { [ "$(sinfo --noheader --Node --states=idle --format=%N | sort -u | wc -l)" = 2 ]; }
	await 30 "both nodes idle" both_idle
	sinfo --Node --long

	step "the job array, four shards, and the job that joins them"
	# The second shard is stopped once, as by a preemption, and goes on by itself.
	mv bin/beadwell bin/beadwell-itself
	cat >bin/beadwell <<'END'
#!/bin/sh
if [ "$1 $SLURM_ARRAY_TASK_ID" = "batch 2" ] && [ "${SLURM_RESTART_COUNT:-0}" = 0 ]; then
	exec timeout --preserve-status --signal=TERM 0.1 beadwell-itself "$@"
fi
exec beadwell-itself "$@"
END
	chmod +x bin/beadwell
	array=$(sbatch --parsable --array=1-4 "$here/array.sbatch" tonight by-slurm)
	joined=$(sbatch --parsable --dependency=afterok:"$array" "$here/collect.sbatch" by-slurm)
	ended() {
		local now
		now=$(scontrol --oneliner show job "$1") && ! grep -qE 'JobState=(PENDING|RUNNING|COMPLETING|CONFIGURING|REQUEUED)' <<<"$now"
	}
	restarted() { scontrol --oneliner show job "${array}_2" | grep -q 'JobState=PENDING .*Restarts=1 '; }
	await 60 "the second shard stopped and requeued" restarted
	scontrol update "JobId=${array}_2" StartTime=now # Slurm lets a requeued job wait for two minutes
	await 90 "the array" ended "$array"
	scontrol --oneliner show job "$array" | sed -E 's/.*ArrayTaskId=([0-9]+).*JobState=([A-Z]+).* Restarts=([0-9]+).* NodeList=([^ ]*).*/task \1: \2 on \4, restarts: \3/'
	await 60 "the joining job" ended "$joined"
	# Exit status 5, as that of the plain run: a recording of this folder is broken.
	scontrol --oneliner show job "$joined" | grep -oE 'ExitCode=[0-9]+:[0-9]+'
	scontrol --oneliner show job "$joined" | grep -q 'ExitCode=5:0'
	cat "beadwell-collect-$joined.log"
	# Nothing of a job is left behind when the daemons end.
	no_step() { [ -z "$(squeue --noheader)" ] && ! pgrep -f "slurmstepd: \[($array|$joined)" >/dev/null; }
	await 30 "the last step ended" no_step
	compare Slurm by-slurm
fi

step "done"
