#!/bin/sh
# Asks Leat about every asset of a file, one request a line, and keeps the answers only if they are whole.
#
#   bulk.sh REQUESTS.ndjson ANSWERS.ndjson [OPERATION]
#
# curl sends while it receives, so that a register of any length needs no memory. LEAT_URL says where the service is.
set -eu
requests=$1 answers=$2 operation=${3:-depths}
url=${LEAT_URL:-http://127.0.0.1:8080}/v1/bulk/$operation?detail=brief
part=$answers.part

curl -sS --fail-with-body -X POST -T "$requests" -H 'Content-Type: application/x-ndjson' -o "$part" "$url" || {
  cat "$part" >&2 # a problem says what is wrong with the whole request
  exit 1
}
end=$(tail -n 1 "$part")
case $end in
  '{"end":true,'*) ;;
  *) echo "the answer is not whole: $end" >&2; exit 1 ;;
esac
told=$(printf '%s' "$end" | sed 's/.*"sha256":"\([0-9a-f]*\)".*/\1/')
hash=$(sed '$d' "$part" | sha256sum | cut -d ' ' -f 1)
if [ "$told" != "$hash" ]; then
  echo "the answer was changed on its way: its hash is $hash, not $told" >&2
  exit 1
fi
sed '$d' "$part" >"$answers"
rm "$part"
echo "$end"
