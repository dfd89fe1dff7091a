-- Questions asked of a sweep after it was swept: answered from its stored measures. The sweep is complete without them, so they stand
-- apart from the questions it was made of. Ordinals go on where those of windrow.sweep_question end.
create table windrow.follow_up (
  sweep text not null references windrow.sweep,
  ordinal integer not null,
  question_id bytea not null references windrow.question,
  primary key (sweep, ordinal),
  unique (sweep, question_id)
);
