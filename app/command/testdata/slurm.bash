#!/usr/bin/env bash
# Runs a command beside a Slurm cluster of one node, this machine, that exists for so long
# only: munged, slurmctld and slurmd of Debian's slurm-wlm and munge, with all their files
# in a scratch folder. Needs root. Usage: slurm.bash COMMAND...
set -euo pipefail

for program in munged slurmctld slurmd sbatch scontrol; do
	command -v "$program" >/dev/null || {
		echo "slurm.bash: no $program here; apt install slurm-wlm munge" >&2
		exit 77
	}
done
[[ $EUID -eq 0 ]] || {
	echo "slurm.bash: slurmd needs root" >&2
	exit 77
}

scratch=$(mktemp -d)
started=()
finish() {
	local pid
	for pid in "${started[@]}"; do kill "$pid" 2>/dev/null || true; done
	wait
	rm -rf "$scratch"
}
trap finish EXIT

mkdir -m 755 "$scratch/munge"
mkdir "$scratch/state" "$scratch/spool"
chmod 755 "$scratch"
head -c 128 /dev/urandom >"$scratch/munge.key"
chmod 400 "$scratch/munge.key"
munged --foreground --force --key-file="$scratch/munge.key" --socket="$scratch/munge/socket" --seed-file="$scratch/munge/seed" \
	--pid-file="$scratch/munge/pid" --log-file="$scratch/munge/log" --num-threads=2 2>"$scratch/munged.err" &
started+=($!)

node=$(hostname -s)
port=$((20000 + RANDOM % 10000))
cat >"$scratch/slurm.conf" <<CONF
ClusterName=scratch
SlurmctldHost=$node(127.0.0.1)
SlurmUser=root
SlurmdUser=root
AuthType=auth/munge
AuthInfo=socket=$scratch/munge/socket
CredType=cred/munge
SlurmctldPort=$port
SlurmdPort=$((port + 1))
SlurmctldPidFile=$scratch/slurmctld.pid
SlurmdPidFile=$scratch/slurmd.pid
SlurmctldLogFile=$scratch/slurmctld.log
SlurmdLogFile=$scratch/slurmd.log
StateSaveLocation=$scratch/state
SlurmdSpoolDir=$scratch/spool
ProctrackType=proctrack/linuxproc
TaskPlugin=task/none
SelectType=select/cons_tres
SelectTypeParameters=CR_CPU
SchedulerParameters=bf_interval=1,sched_min_interval=100000
MpiDefault=none
ReturnToService=2
KillWait=2
NodeName=$node NodeAddr=127.0.0.1 CPUs=$(nproc) State=UNKNOWN
PartitionName=scratch Nodes=$node Default=YES MaxTime=INFINITE State=UP
CONF
export SLURM_CONF=$scratch/slurm.conf

slurmctld -D -f "$SLURM_CONF" >/dev/null 2>&1 &
started+=($!)
slurmd -D -f "$SLURM_CONF" -N "$node" >/dev/null 2>&1 &
started+=($!)

for _ in $(seq 120); do
	state=$(sinfo --noheader --format=%t 2>/dev/null || true)
	[[ $state == idle ]] && break
	sleep 0.5
done
if [[ ${state:-} != idle ]]; then
	echo "slurm.bash: the node did not come up (${state:-no answer})" >&2
	tail -n 20 "$scratch"/munged.err "$scratch"/munge/log "$scratch"/*.log >&2 || true
	exit 77
fi
"$@"
