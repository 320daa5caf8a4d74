-- The depths of every asset, through psql and curl alone:
--
--   LEAT_URL=http://127.0.0.1:8080 psql -v ON_ERROR_STOP=1 -f psql_copy.sql
--
-- The unusual quote and delimiter keep \copy from touching the JSON; -T - sends while it receives. answers.ndjson is left in the current folder.
\ir requests.sql
create table if not exists ostermere.depths (
  asset text primary key, normal_depth double precision, critical_depth double precision, normal_velocity double precision,
  fill double precision, slope_class text, capacity_ratio double precision, freeboard double precision, problem text);

\copy (select request from ostermere.requests order by asset_code) to program 'curl -sS --fail-with-body -X POST -T - -H "Content-Type: application/x-ndjson" -o answers.ndjson "${LEAT_URL:-http://127.0.0.1:8080}/v1/bulk/depths?detail=brief"' (format csv, quote e'\x01', delimiter e'\x02')

begin;
create temporary table lines (line jsonb) on commit drop;
\copy lines from 'answers.ndjson' (format csv, quote e'\x01', delimiter e'\x02')
do $$
begin -- the last line says that the answer is whole, and how many lines it has
  if not exists (select from lines where line @> '{"end": true}' and (line ->> 'lines')::bigint = (select count(*) - 1 from lines)) then
    raise exception 'the answer is not whole';
  end if;
end
$$;
truncate ostermere.depths;
insert into ostermere.depths
select line ->> 'id', (r ->> 'normal_depth')::float8, (r ->> 'critical_depth')::float8, (r ->> 'normal_velocity')::float8, (r ->> 'fill')::float8,
  r ->> 'slope_class', (r #>> '{capacity,ratio}')::float8, (r ->> 'freeboard')::float8, line #>> '{problem,detail}'
from lines, lateral (select line -> 'result' as r) as answer
where line ? 'line';
commit;
