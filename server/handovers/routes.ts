import * as api from '../../shared/api/handovers.ts';
import * as logApi from '../../shared/api/log.ts';
import { endpoint } from '../http/endpoint.ts';
import { exportLog } from './exportLog.ts';
import { handOver } from './handOver.ts';
import { listHolders } from './listHolders.ts';
import { readLog } from './readLog.ts';
import { undoHandover } from './undoHandover.ts';

export const handoverRoutes = [
  endpoint(api.handOver, { handle: (context) => handOver(context, context.body) }),
  endpoint(api.undoHandover, { handle: (context) => undoHandover(context, context.params.handoverId) }),
  endpoint(api.listHolders, { handle: (context) => listHolders(context) }),
  endpoint(logApi.readLog, { handle: (context) => readLog(context, context.query) }),
  endpoint(logApi.exportLog, { handle: (context) => exportLog(context, context.body) }),
];
