-- A file that is loaded again in another version takes the place of the earlier
-- one, which stays: taking the later one back makes the earlier one count again.
-- Rows of sources are never changed, so what counts no more is listed beside.
create table kelvinrow.superseded (
    portfolio text not null,
    source bigint not null, -- counts no more ...
    by_source bigint not null, -- ... as long as this one is here
    primary key (portfolio, source),
    constraint superseded_is_a_source foreign key (portfolio, source) references kelvinrow.source on delete cascade,
    constraint superseded_by_a_source foreign key (portfolio, by_source) references kelvinrow.source on delete cascade
);
create index superseded_by_source on kelvinrow.superseded (portfolio, by_source);

-- A name or a content may come several times, if only one of them counts.
alter table kelvinrow.source
    drop constraint source_is_loaded_once,
    drop constraint source_name_is_unique,
    add column path text not null default '', -- where the file lay
    add column reading text not null default ''; -- how it was read: what else decides what it says

comment on column kelvinrow.source.reading is
    'The options of reading in one line; the same content read in the same way is the same source. Empty in sources loaded before this was kept.';

create index source_by_name on kelvinrow.source (portfolio, file);
create index source_by_content on kelvinrow.source (portfolio, sha256);

alter table kelvinrow.superseded enable row level security;
alter table kelvinrow.superseded force row level security;
create policy only_own_portfolio on kelvinrow.superseded
    using (portfolio = current_setting('kelvinrow.portfolio', true))
    with check (portfolio = current_setting('kelvinrow.portfolio', true));

do $$
declare
    r text;
begin
    foreach r in array array['kelvinrow_reader', 'kelvinrow_loader', 'kelvinrow_screener'] loop
        if not exists (select from pg_roles where rolname = r) then
            continue;
        end if;
        begin
            execute format('grant select on kelvinrow.superseded to %I', r);
            if r <> 'kelvinrow_reader' then
                execute format('grant insert, delete on kelvinrow.superseded to %I', r);
            end if;
        exception
            when insufficient_privilege then
                raise notice 'role % is not given its rights: this account may not', r;
        end;
    end loop;
end $$;
