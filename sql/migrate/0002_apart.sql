-- Portfolios are kept apart also from programs that forget to ask for one: each
-- transaction says which portfolio it works on, and sees no other. Superusers and
-- roles that bypass row-level security are not held by this, so every query of
-- the program names its portfolio too.
do $$
declare
    t text;
begin
    foreach t in array array['portfolio', 'source', 'sheet', 'record', 'finding', 'run', 'run_building'] loop
        execute format('alter table kelvinrow.%I enable row level security', t);
        execute format('alter table kelvinrow.%I force row level security', t);
        execute format($p$create policy only_own_portfolio on kelvinrow.%I
            using (portfolio = current_setting('kelvinrow.portfolio', true))
            with check (portfolio = current_setting('kelvinrow.portfolio', true))$p$, t);
    end loop;
end $$;

-- Roles with least rights, to be granted to a server's own accounts: a loader
-- brings data, a screener also makes runs, a reader reads. Where this account may
-- not make roles, the owner of the tables works alone.
do $$
declare
    r text;
begin
    foreach r in array array['kelvinrow_reader', 'kelvinrow_loader', 'kelvinrow_screener'] loop
        begin
            execute format('create role %I nologin', r);
        exception
            when duplicate_object or unique_violation then null;
            when insufficient_privilege then
                raise notice 'role % is not made: this account may not', r;
        end;
        if not exists (select from pg_roles where rolname = r) then
            continue;
        end if;
        execute format('grant usage on schema kelvinrow to %I', r);
        execute format('grant select on all tables in schema kelvinrow to %I', r);
        if r in ('kelvinrow_loader', 'kelvinrow_screener') then
            execute format('grant insert, update on kelvinrow.portfolio to %I', r);
            execute format('grant insert, delete on kelvinrow.source, kelvinrow.sheet, kelvinrow.record, kelvinrow.finding to %I', r);
        end if;
        if r = 'kelvinrow_screener' then
            execute format('grant insert on kelvinrow.run, kelvinrow.run_building to %I', r);
        end if;
    end loop;
end $$;
