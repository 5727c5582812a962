import * as api from '../../shared/api/arrivals.ts';
import * as calendar from '../../shared/api/voyages.ts';
import { endpoint } from '../http/endpoint.ts';
import { addGuest, addVisitor, importList } from './addGuests.ts';
import { guestAshore, guestBack } from './ashore.ts';
import { editGuest, removeGuest } from './editGuest.ts';
import { createParty, editParty } from './editParties.ts';
import { eraseGuest } from './eraseGuests.ts';
import { partyAshore } from './partyAshore.ts';
import { previewList } from './previewList.ts';
import { readArrivals } from './readArrivals.ts';
import { createVoyage, deleteVoyage, editVoyage, listVoyages } from './voyages.ts';

export const voyageRoutes = [
  endpoint(api.readArrivals, { handle: (context) => readArrivals(context, context.query) }),
  endpoint(api.previewList, { handle: (context) => previewList(context, context.body) }),
  endpoint(api.importList, { handle: (context) => importList(context, context.body) }),
  endpoint(api.addGuest, { handle: (context) => addGuest(context, context.body) }),
  endpoint(api.editGuest, { handle: (context) => editGuest(context, context.params.guestId, context.body) }),
  endpoint(api.removeGuest, { handle: (context) => removeGuest(context, context.params.guestId) }),
  endpoint(api.addVisitor, { handle: (context) => addVisitor(context, context.body) }),
  endpoint(api.guestAshore, { handle: (context) => guestAshore(context, context.params.guestId) }),
  endpoint(api.guestBack, { handle: (context) => guestBack(context, context.params.guestId) }),
  endpoint(api.eraseGuest, { handle: (context) => eraseGuest(context, context.params.guestId) }),
  endpoint(api.createParty, { handle: (context) => createParty(context, context.body) }),
  endpoint(api.editParty, { handle: (context) => editParty(context, context.params.partyId, context.body) }),
  endpoint(api.partyAshore, {
    handle: (context) => partyAshore(context, context.params.partyId, context.body.cards),
  }),
  endpoint(calendar.listVoyages, { handle: (context) => listVoyages(context, context.query) }),
  endpoint(calendar.createVoyage, { handle: (context) => createVoyage(context, context.body) }),
  endpoint(calendar.editVoyage, {
    handle: (context) => editVoyage(context, context.params.voyageId, context.body),
  }),
  endpoint(calendar.deleteVoyage, { handle: (context) => deleteVoyage(context, context.params.voyageId) }),
];
