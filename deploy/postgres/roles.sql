-- Roles and logins of a new database server; the PostgreSQL image runs this file once, when its volume is empty.
-- `windrow migrate --grant` gives the roles their rights. Passwords come from the environment, so that no command line shows them.
\getenv writer_password WRITER_PASSWORD
\getenv reader_password READER_PASSWORD
create role windrow_writer nologin;
create role windrow_reader nologin;
create role writer login password :'writer_password' in role windrow_writer;
create role reader login password :'reader_password' in role windrow_reader;
