-- Everything carries its portfolio first, so that clients are kept apart and the
-- tables can be distributed by it.
create schema if not exists kelvinrow;

create table kelvinrow.migration (
    version integer primary key,
    name text not null,
    checksum text not null,
    applied_at timestamptz not null default now()
);

create table kelvinrow.portfolio (
    portfolio text primary key,
    loads bigint not null default 0, -- counts loads; also what a load locks
    created_at timestamptz not null default now()
);

-- A source is one file as loaded.
create table kelvinrow.source (
    portfolio text not null references kelvinrow.portfolio,
    source bigint not null,
    file text not null,
    sha256 bytea not null,
    file_date text not null,
    bytes bigint not null,
    load bigint not null,
    loaded_at timestamptz not null default now(),
    primary key (portfolio, source),
    constraint source_is_loaded_once unique (portfolio, sha256),
    constraint source_name_is_unique unique (portfolio, file)
);

create table kelvinrow.sheet (
    portfolio text not null,
    sheet bigint not null,
    source bigint not null,
    name text not null,
    file_date text not null,
    load bigint not null,
    columns jsonb not null, -- column letters by field
    primary key (portfolio, sheet),
    constraint sheet_has_source foreign key (portfolio, source) references kelvinrow.source on delete cascade
);

-- A record is one row of one sheet: what one source says of one building. Rows
-- are inserted and deleted with their source, never updated.
create table kelvinrow.record (
    portfolio text not null,
    building text collate "C" not null,
    sheet bigint not null,
    row_number integer not null,
    survey_date text,
    kind text not null,      -- of the values of this row ...
    other_kinds text[],      -- ... but these: field=kind
    name text,
    street text,
    postcode text,
    town text,
    district text,
    region text,
    use text,
    attachment text,
    year_built_from smallint,
    year_built_to smallint,
    year_wall_from smallint,
    year_wall_to smallint,
    year_roof_from smallint,
    year_roof_to smallint,
    year_floor_from smallint,
    year_floor_to smallint,
    year_windows_from smallint,
    year_windows_to smallint,
    floor_area float8,
    volume float8,
    gross_volume float8,
    storeys float8,
    storey_height float8,
    footprint float8,
    perimeter float8,
    wall_area float8,
    roof_area float8,
    ground_floor_area float8,
    window_area float8,
    door_area float8,
    wall_u float8,
    roof_u float8,
    floor_u float8,
    window_u float8,
    wall_construction text,
    roof_type text,
    floor_type text,
    glazing text,
    ventilation text,
    supply_airflow float8,
    extract_airflow float8,
    heat_recovery float8,
    fan_power float8,
    n50 float8,
    q50 float8,
    exposure text,
    heating_system text,
    carrier text,
    efficiency float8,
    metered_heat float8,
    metered_year_from smallint,
    metered_year_to smallint,
    meter_includes_hot_water boolean,
    degree_days float8,
    occupants float8,
    dwellings float8,
    protected boolean,
    facade_stays boolean,
    flats_let float8,
    restrictions text,
    surveyor text,
    primary key (portfolio, building, sheet, row_number),
    constraint record_kind_is_known check (kind in ('registered', 'certified', 'metered', 'surveyed'))
);
create index record_by_sheet on kelvinrow.record (portfolio, sheet);

create table kelvinrow.finding (
    portfolio text not null,
    source bigint not null,
    number integer not null,
    severity text not null,
    check_name text not null,
    file text not null,
    sheet text not null,
    row_number integer not null,
    column_letters text not null,
    field text not null,
    building text not null,
    raw text not null,
    message text not null,
    fix text not null,
    primary key (portfolio, source, number),
    constraint finding_has_source foreign key (portfolio, source) references kelvinrow.source on delete cascade,
    constraint finding_severity_is_known check (severity in ('note', 'warning', 'error'))
);

create table kelvinrow.run (
    portfolio text not null references kelvinrow.portfolio,
    run integer not null,
    ran_at timestamptz not null,
    version text not null,
    climate text not null,
    assumptions text not null,
    inputs text not null,
    yardstick text not null,
    seed bigint not null,
    measures text[] not null,
    buildings integer not null,
    failed integer not null,
    files text[] not null,
    primary key (portfolio, run)
);

-- The estimate of one building in one run. Arrays named measure_* are parallel
-- to run.measures: narrow rows would cost five to eight times the time and space.
create table kelvinrow.run_building (
    portfolio text not null,
    run integer not null,
    id text collate "C" not null,
    name text,
    street text,
    postcode text,
    town text,
    district text,
    use text,
    attachment text,
    ventilation text,
    heating text,
    carrier text,
    year_built integer,
    failed text,
    floor_area_m2 float8,
    volume_m3 float8,
    u_wall float8,
    u_roof float8,
    u_floor float8,
    u_window float8,
    n50_per_h float8,
    air_changes_per_h float8,
    under_ventilated boolean,
    transmission_wk float8,
    ventilation_wk float8,
    loss_by_path_kwh float8[],
    gains_used_kwh float8,
    need_kwh float8,
    delivered_kwh float8,
    fans_kwh float8,
    design_load_w float8,
    co2_kg float8,
    money_per_year float8,
    metered_kwh float8,
    input_share float8[],
    cautions bigint,
    measure_applies boolean[],
    measure_reason text[],
    measure_quantity float8[],
    measure_companion_quantity float8[],
    measure_cost float8[],
    measure_upkeep_per_year float8[],
    measure_need_saving_kwh float8[],
    measure_carrier_after text[],
    measure_heat_before_kwh float8[],
    measure_heat_after_kwh float8[],
    measure_fans_before_kwh float8[],
    measure_fans_after_kwh float8[],
    measure_saving_kwh float8[],
    measure_co2_kg float8[],
    measure_money_per_year float8[],
    measure_npv float8[],
    measure_payback_years float8[],
    measure_cost_of_saved_kwh float8[],
    measure_under_ventilated boolean[],
    measure_cautions bigint[],
    primary key (portfolio, run, id),
    constraint run_building_has_run foreign key (portfolio, run) references kelvinrow.run on delete cascade
);
