-- A view of the register with what leat register run found, for maps and reports: every asset once, with its verdict, what governs it, and why there is
-- none where there is none.
--
--   psql -v ON_ERROR_STOP=1 -f results_view.sql
create or replace view ostermere.appraised_channels as
select c.*,
  coalesce(r.verdict, case when p.asset is not null then 'not_computed' when c.status <> 'in_use' then 'not_asked' else 'not_yet' end) as verdict,
  r.governing_flow, r.governing_criterion, r.governing_value, r.governing_limit, r.governing_unit,
  p.problems, r.engine_version, r.computed_at
from ostermere.channels c
left join ostermere.leat_results r on r.asset = c.asset_code
left join (
  select asset, string_agg(coalesce("column" || ': ', '') || text, ' ' order by pointer, text) as problems
  from ostermere.leat_results_problems group by asset) p on p.asset = c.asset_code;

comment on view ostermere.appraised_channels is
  'Channels with the verdicts of leat register. A verdict holds for the criteria of the mapping file; local codes and a licensed engineer decide.';
