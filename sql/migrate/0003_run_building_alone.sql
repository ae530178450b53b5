-- Estimates are written and deleted with their run by one statement each, in one
-- transaction. A foreign key would check that again for each of a hundred
-- thousand rows: it took a fifth of the time of storing a run.
alter table kelvinrow.run_building drop constraint run_building_has_run;

comment on table kelvinrow.run_building is
    'The estimate of one building in one run. Arrays named measure_* are parallel to run.measures; where a measure does not apply, figures are null. All of them are null where no estimate could be made.';
