-- A view that makes each asset of the register a request for `depths`, as JSON. The other recipes in SQL use it; change it to the columns of your own
-- register. null is left out: what belongs to another kind of section does no harm.
create or replace view ostermere.requests as
select c.asset_code, jsonb_build_object(
    'id', c.asset_code,
    'section', jsonb_build_object(
      'kind', coalesce(k.kind, c.shape),
      'bottom_width', c.bottom_width,
      'side_slope', c.side_slope,
      'bank_height', case when k.kind <> 'parabolic' then c.bank_height end,
      'diameter', case when k.kind = 'circular' then c.height_mm / 1000.0 end,
      'width', c.width_mm / 1000.0,
      'height', case when k.kind = 'parabolic' then c.bank_height when k.kind in ('box', 'egg') then c.height_mm / 1000.0 end,
      'top_width', c.top_width,
      'cross_slope', c.cross_fall / 100,
      'curb_height', case when k.kind = 'gutter' then c.height_mm / 1000.0 end,
      'points', p.points),
    'barrels', c.barrels,
    'roughness', jsonb_build_object('manning', m.manning),
    -- the levels fall over a length in plan; bed_slope is the sine of that angle
    'bed_slope', (c.upstream_level - c.downstream_level) / nullif(sqrt((c.upstream_level - c.downstream_level) ^ 2 + c.length ^ 2), 0),
    'discharge', c.flow_design) as request
from ostermere.channels c
left join (values ('TRAP', 'trapezoidal'), ('RECT', 'rectangular'), ('VEE', 'triangular'), ('PIPE', 'circular'), ('BOX', 'box'), ('EGG', 'egg'),
    ('GUTTER', 'gutter'), ('SWALE', 'parabolic'), ('SURVEY', 'surveyed')) k (shape, kind) using (shape)
left join (values ('EARTH', 0.028), ('WEEDY', 0.045), ('GRASS', 0.06), ('STONE', 0.025), ('CONCRETE', 0.013), ('BRICK', 0.015), ('CLAY', 0.013),
    ('PLASTIC', 0.01), ('STEEL', 0.024)) m (material, manning) using (material)
left join lateral (
  select jsonb_agg(jsonb_build_array(s."offset", s.level) order by s.place) as points
  from ostermere.section_points s where s.asset_code = c.asset_code and c.shape = 'SURVEY') p on true
where c.status = 'in_use';
