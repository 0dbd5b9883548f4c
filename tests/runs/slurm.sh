#!/bin/sh
# A one-node Slurm in the folder $1, without network, accounts or privileges beyond root's; runs the
# job array of configs/overnight-slurm.sh in $2 parts on DESIGN $3 into RUN $4 and waits for it.
# More arguments go to the search. DRAWTUBE names the program.
set -eu
mkdir -p "$1"
home=$(cd "$1" && pwd) PARTS=$2 design=$3 run=$4
shift 4
export PARTS DRAWTUBE
mkdir -p "$home/state" "$home/spool"
host=$(hostname -s)
port=$((20000 + $$ % 20000))
SLURM_CONF=$home/slurm.conf
export SLURM_CONF
cat > "$SLURM_CONF" <<END
ClusterName=one
SlurmctldHost=$host
SlurmctldPort=$port
SlurmdPort=$((port + 1))
AuthType=auth/none
CredType=cred/none
ProctrackType=proctrack/pgid
TaskPlugin=task/none
SwitchType=switch/none
MpiDefault=none
SlurmUser=root
StateSaveLocation=$home/state
SlurmdSpoolDir=$home/spool
SlurmctldPidFile=$home/slurmctld.pid
SlurmdPidFile=$home/slurmd.pid
SlurmctldLogFile=$home/slurmctld.log
SlurmdLogFile=$home/slurmd.log
SelectType=select/cons_tres
SelectTypeParameters=CR_CPU
AccountingStorageType=accounting_storage/none
NodeName=$host NodeAddr=127.0.0.1 CPUs=2 State=UNKNOWN
PartitionName=all Nodes=ALL Default=YES MaxTime=INFINITE State=UP
END
slurmctld -i -D > /dev/null 2>&1 &
controller=$!
slurmd -D > /dev/null 2>&1 &
node=$!
trap 'kill $node $controller 2> /dev/null; wait' EXIT
tries=0
until sinfo -h -t idle -o %N 2> /dev/null | grep -q .; do
  tries=$((tries + 1))
  [ "$tries" -lt 150 ] || { cat "$home"/*.log >&2; exit 1; }
  sleep 0.1
done
sbatch --wait --array="1-$PARTS" --output="$home/part-%a.log" \
  "$(dirname "$0")/../../configs/overnight-slurm.sh" "$design" "$run" "$@"
