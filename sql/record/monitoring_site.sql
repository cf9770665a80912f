-- Intervals: which monitor sat where.
create table record.monitoring_site (
  run_key text not null,
  site_no integer not null,
  device text not null,
  body_site text,
  from_h double,
  to_h double,
  primary key (run_key, site_no)
);
comment on table record.monitoring_site is 'Monitoring sites';
comment on column record.monitoring_site.run_key is 'the run';
comment on column record.monitoring_site.site_no is 'order of the rows of this run';
comment on column record.monitoring_site.device is 'device';
comment on column record.monitoring_site.body_site is 'site; only right-sided arm, hand or ear shows differential hypoxaemia';
comment on column record.monitoring_site.from_h is 'from; unit h';
comment on column record.monitoring_site.to_h is 'to; unit h'
