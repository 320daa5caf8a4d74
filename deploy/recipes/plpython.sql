-- The depths of every asset from inside PostgreSQL, with PL/Python (Debian's postgresql-plpython3-15; only a superuser may install it):
--
--   psql -v ON_ERROR_STOP=1 -f plpython.sql
--
-- The server itself calls the service, at the address in leat.url (PGOPTIONS=-cleat.url=http://…). A batch of a thousand assets is one call, far below any time limit.
\ir requests.sql
create extension if not exists plpython3u;

create or replace function ostermere.leat_depths(requests jsonb, url text) returns jsonb
language plpython3u as $$
import json, urllib.error, urllib.request
request = urllib.request.Request(url + "/v1/bulk/depths?flat=true", requests.encode(), {"Content-Type": "application/json"})
try:
    with urllib.request.urlopen(request, timeout=30) as response:
        return response.read().decode()
except urllib.error.HTTPError as error:
    plpy.error(json.load(error)["detail"])
$$;

create table if not exists ostermere.depths (
  asset text primary key, normal_depth double precision, critical_depth double precision, normal_velocity double precision,
  fill double precision, slope_class text, capacity_ratio double precision, freeboard double precision, problem text);

begin;
truncate ostermere.depths;
insert into ostermere.depths
select a.* from (
  select jsonb_agg(request order by asset_code) as requests
  from (select *, (row_number() over (order by asset_code) - 1) / 1000 as batch from ostermere.requests) as numbered
  group by batch) as batches,
lateral jsonb_to_recordset(ostermere.leat_depths(requests, coalesce(current_setting('leat.url', true), 'http://127.0.0.1:8080'))) as a (
  id text, normal_depth float8, critical_depth float8, normal_velocity float8, fill float8, slope_class text, capacity_ratio float8, freeboard float8, problem text);
commit;
