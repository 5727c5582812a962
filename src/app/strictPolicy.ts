import { config } from 'zod/v4/core';

// Zod tries `new Function` once to see whether it may compile schemas; under the content security policy that try
// alone is a violation. This module must be evaluated before any schema is made.
config({ jitless: true });
