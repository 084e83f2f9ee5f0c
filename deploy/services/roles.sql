-- Rights on PostgreSQL: psql --dbname weirbook --file deploy/services/roles.sql, as a superuser: once before the first
-- `migrate`, which makes the two roles (then give each a password: \password weirbook_owner, \password weirbook), and again
-- after each `migrate`. Running it again changes nothing.
--
-- weirbook_owner owns the tables; only `migrate` signs in as this role.
-- weirbook       is the one in DATABASE_URL. It can add records and never change or remove one: the rights to do so
--                are not there, whatever the program or a person with its password tries.
--
-- A new table can be added to and nothing more, until it is named below.

DO $$
BEGIN
    IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = 'weirbook_owner') THEN
        CREATE ROLE weirbook_owner LOGIN;
    END IF;
    IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = 'weirbook') THEN
        CREATE ROLE weirbook LOGIN;
    END IF;
END $$;

GRANT USAGE ON SCHEMA public TO weirbook;
GRANT USAGE, CREATE ON SCHEMA public TO weirbook_owner;

REVOKE ALL ON ALL TABLES IN SCHEMA public FROM weirbook;
GRANT SELECT, INSERT ON ALL TABLES IN SCHEMA public TO weirbook;

DO $$
DECLARE
    name text;
BEGIN
    IF to_regclass('django_migrations') IS NOT NULL THEN
        REVOKE INSERT ON django_migrations FROM weirbook;
    END IF;
    -- Heads of the books, people and what hangs on signing in, work to be done, and what can be computed again.
    FOREACH name IN ARRAY ARRAY[
        'ledger_book',
        'accounts_person', 'accounts_secondfactor', 'accounts_person_groups', 'accounts_person_user_permissions',
        'django_session', 'axes_accessattempt', 'axes_accessattemptexpiration', 'axes_accessfailurelog', 'axes_accesslog',
        'jobs_job', 'jobs_turn', 'reports_draft', 'notices_notice',
        'works_device', 'works_pin', 'works_tries', 'works_spell',
        'api_token',
        'dosing_daystate'
    ] LOOP
        IF to_regclass(name) IS NOT NULL THEN
            EXECUTE format('GRANT UPDATE, DELETE ON %I TO weirbook', name);
        END IF;
    END LOOP;
END $$;

ALTER DEFAULT PRIVILEGES FOR ROLE weirbook_owner IN SCHEMA public GRANT SELECT, INSERT ON TABLES TO weirbook;
