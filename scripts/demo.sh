#!/bin/sh
# The main job on the demo network: scripts/demo.sh BUSLOOM
busloom=${BUSLOOM_BIN:-$1}
set -e
say() { printf '\n== %s\n' "$*"; }

say "The description of Heron, a delivery van: is it sound?"
"$busloom" check --quiet schemas/heron.bus

say "A stop from 80 km/h on a wet patch: road speed and the four wheels, every 0.25 s"
"$busloom" decode --map can0=chassis --map can1=powertrain --map can2=body \
	--step 250ms --from +2 --to +9 --only 'RoadSpeed.speed on chassis' --only 'WheelSpeeds.wheel*speed' \
	schemas/heron.bus testdata/heron/wet_stop.log.gz

say "Every record of the capture is accounted for"
"$busloom" decode --map can0=chassis --map can1=powertrain --map can2=body \
	--format none schemas/heron.bus testdata/heron/wet_stop.log.gz

cat <<'NEXT'

== What to try next
  bin/busloom decode --map can0=chassis --map can1=powertrain --map can2=body \\
      --format summary --only WheelSpeeds schemas/heron.bus testdata/heron/wet_stop_bad_ring.log.gz
      the same stop with a damaged pickup ring: one wheel stands out
  bin/busloom draw schemas/heron.bus WheelSpeeds
      where each bit of the message sits
  bin/busloom explain PL02
      what a diagnostic code means; "busloom explain" lists them
NEXT
