-- What runs rest on, once for each version of a portfolio: the whole content, so
-- that a run can be explained and its workbook written again.
create table kelvinrow.assumptions (
    portfolio text not null references kelvinrow.portfolio (portfolio) on delete cascade,
    version text not null, -- hash of the content
    name text not null, -- where it came from: a file's name, or the program's own
    stored_at timestamptz not null default now(),
    content bytea not null, -- JSON, compressed
    primary key (portfolio, version)
);

alter table kelvinrow.run
    add column options bytea not null default ''; -- what else its workbook was written from, as the program keeps it

alter table kelvinrow.assumptions enable row level security;
alter table kelvinrow.assumptions force row level security;
create policy only_own_portfolio on kelvinrow.assumptions
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
            execute format('grant select on kelvinrow.assumptions to %I', r);
            if r = 'kelvinrow_screener' then
                execute format('grant insert, delete on kelvinrow.assumptions to %I', r);
            end if;
        exception
            when insufficient_privilege then
                raise notice 'role % is not given its rights: this account may not', r;
        end;
    end loop;
end $$;
