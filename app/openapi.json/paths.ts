import * as retry from '@/app/api/v1/deliveries/[id]/retry/route'
import * as deliveries from '@/app/api/v1/deliveries/route'
import * as incidentFiles from '@/app/api/v1/incidents/[number]/files/route'
import * as incident from '@/app/api/v1/incidents/[number]/route'
import * as incidents from '@/app/api/v1/incidents/route'
import * as cut from '@/app/api/v1/overlays/[slug]/cut/route'
import * as events from '@/app/api/v1/overlays/[slug]/events/route'
import * as exported from '@/app/api/v1/overlays/[slug]/export/[file]/route'
import * as overlayIncidents from '@/app/api/v1/overlays/[slug]/incidents/route'
import * as joiningCode from '@/app/api/v1/overlays/[slug]/joining-codes/[id]/route'
import * as joiningCodes from '@/app/api/v1/overlays/[slug]/joining-codes/route'
import * as linkStory from '@/app/api/v1/overlays/[slug]/links/[a]/[b]/route'
import * as links from '@/app/api/v1/overlays/[slug]/links/route'
import * as moments from '@/app/api/v1/overlays/[slug]/moments/route'
import * as readmission from '@/app/api/v1/overlays/[slug]/nodes/[name]/readmission/route'
import * as revocation from '@/app/api/v1/overlays/[slug]/nodes/[name]/revocation/route'
import * as node from '@/app/api/v1/overlays/[slug]/nodes/[name]/route'
import * as nodes from '@/app/api/v1/overlays/[slug]/nodes/route'
import * as partner from '@/app/api/v1/overlays/[slug]/partners/[team]/route'
import * as invitation from '@/app/api/v1/overlays/[slug]/partners/invitations/[id]/route'
import * as invitations from '@/app/api/v1/overlays/[slug]/partners/invitations/route'
import * as partners from '@/app/api/v1/overlays/[slug]/partners/route'
import * as reading from '@/app/api/v1/overlays/[slug]/reading/route'
import * as readings from '@/app/api/v1/overlays/[slug]/readings/route'
import * as rehearsal from '@/app/api/v1/overlays/[slug]/rehearsals/[id]/route'
import * as rehearsals from '@/app/api/v1/overlays/[slug]/rehearsals/route'
import * as joinedLink from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/joined/route'
import * as plannedLink from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/route'
import * as plannedLinks from '@/app/api/v1/overlays/[slug]/reinforcement/planned/route'
import * as reinforcement from '@/app/api/v1/overlays/[slug]/reinforcement/route'
import * as overlay from '@/app/api/v1/overlays/[slug]/route'
import * as rule from '@/app/api/v1/overlays/[slug]/rules/[id]/route'
import * as rulePreview from '@/app/api/v1/overlays/[slug]/rules/preview/route'
import * as rules from '@/app/api/v1/overlays/[slug]/rules/route'
import * as signingKey from '@/app/api/v1/overlays/[slug]/signing-key/route'
import * as upgrade from '@/app/api/v1/overlays/[slug]/upgrades/[id]/route'
import * as upgrades from '@/app/api/v1/overlays/[slug]/upgrades/route'
import * as weakPlace from '@/app/api/v1/overlays/[slug]/weak/route'
import * as window from '@/app/api/v1/overlays/[slug]/windows/[id]/route'
import * as windows from '@/app/api/v1/overlays/[slug]/windows/route'
import * as overlays from '@/app/api/v1/overlays/route'
import * as partnerships from '@/app/api/v1/partnerships/route'
import type { PathRow } from '@/lib/openapi'

/** Every route below app/api/v1; a test finds those that are missing. */
export const PATHS: readonly PathRow[] = [
  {
    path: '/overlays',
    methods: [
      { method: 'GET', handler: overlays.GET, does: 'Lists the overlays of your teams', answers: 'Overlays' },
      { method: 'POST', handler: overlays.POST, does: 'Makes an overlay', answers: 'Overlay' },
    ],
  },
  {
    path: '/overlays/{slug}',
    methods: [
      { method: 'GET', handler: overlay.GET, does: 'Reads an overlay', answers: 'Overlay' },
      {
        method: 'PATCH',
        handler: overlay.PATCH,
        does: 'Changes when agents retire by themselves',
        answers: 'Overlay',
      },
    ],
  },
  {
    path: '/overlays/{slug}/reading',
    methods: [
      {
        method: 'GET',
        handler: reading.GET,
        does: 'Reads the latest reading, or that of a past moment',
        answers: 'Reading',
      },
    ],
  },
  {
    path: '/overlays/{slug}/readings',
    methods: [
      {
        method: 'GET',
        handler: readings.GET,
        does: 'Lists readings in steps over a time',
        answers: 'Readings',
      },
    ],
  },
  {
    path: '/overlays/{slug}/cut',
    methods: [
      {
        method: 'GET',
        handler: cut.GET,
        does: 'Reads the weak cut: sides and crossing links',
        answers: 'Cut',
      },
    ],
  },
  {
    path: '/overlays/{slug}/nodes',
    methods: [{ method: 'GET', handler: nodes.GET, does: 'Lists nodes by name', answers: 'Nodes' }],
  },
  {
    path: '/overlays/{slug}/nodes/{name}',
    methods: [
      { method: 'GET', handler: node.GET, does: 'Reads a node and its story', answers: 'NodeStory' },
      {
        method: 'DELETE',
        handler: node.DELETE,
        does: 'Retires a node: it is not counted any more and its name is free',
        answers: 'Node',
      },
    ],
  },
  {
    path: '/overlays/{slug}/nodes/{name}/revocation',
    methods: [
      { method: 'POST', handler: revocation.POST, does: 'Refuses an agent’s key for good', answers: 'Node' },
    ],
  },
  {
    path: '/overlays/{slug}/nodes/{name}/readmission',
    methods: [
      {
        method: 'POST',
        handler: readmission.POST,
        does: 'Takes back an agent that was left out',
        answers: 'Node',
      },
    ],
  },
  {
    path: '/overlays/{slug}/links',
    methods: [
      { method: 'GET', handler: links.GET, does: 'Lists links as disclosure allows', answers: 'Links' },
    ],
  },
  {
    path: '/overlays/{slug}/links/{a}/{b}',
    methods: [
      { method: 'GET', handler: linkStory.GET, does: 'Reads a link and its story', answers: 'LinkStory' },
    ],
  },
  {
    path: '/overlays/{slug}/weak',
    methods: [
      {
        method: 'GET',
        handler: weakPlace.GET,
        does: 'Reads where the overlay is weakest, what that follows and what each crossing link carries',
        answers: 'WeakPlace',
      },
    ],
  },
  {
    path: '/overlays/{slug}/moments',
    methods: [
      {
        method: 'GET',
        handler: moments.GET,
        does: 'Lists the moments of which a snapshot is kept',
        answers: 'Moments',
      },
    ],
  },
  {
    path: '/overlays/{slug}/reinforcement',
    methods: [
      {
        method: 'GET',
        handler: reinforcement.GET,
        does: 'Works out which new links would help most; lists those that are planned',
        answers: 'Reinforcement',
      },
    ],
  },
  {
    path: '/overlays/{slug}/reinforcement/planned',
    methods: [
      { method: 'POST', handler: plannedLinks.POST, does: 'Plans a new link', answers: 'PlannedLink' },
    ],
  },
  {
    path: '/overlays/{slug}/reinforcement/planned/{id}',
    methods: [
      {
        method: 'DELETE',
        handler: plannedLink.DELETE,
        does: 'Withdraws a planned link',
        answers: 'PlannedLink',
      },
    ],
  },
  {
    path: '/overlays/{slug}/reinforcement/planned/{id}/joined',
    methods: [
      {
        method: 'POST',
        handler: joinedLink.POST,
        does: 'Says that a planned link has been joined',
        answers: 'PlannedLink',
      },
    ],
  },
  {
    path: '/overlays/{slug}/events',
    methods: [
      {
        method: 'GET',
        handler: events.GET,
        does: 'Lists the events of the last hour, or follows them',
        answers: 'Events',
        streams: true,
      },
    ],
  },
  {
    path: '/overlays/{slug}/incidents',
    methods: [
      {
        method: 'GET',
        handler: overlayIncidents.GET,
        does: 'Lists incidents of an overlay, newest first',
        answers: 'Incidents',
      },
    ],
  },
  {
    path: '/overlays/{slug}/rehearsals',
    methods: [
      {
        method: 'GET',
        handler: rehearsals.GET,
        does: 'Lists rehearsals, newest first, 100 at most',
        answers: 'Rehearsals',
      },
      {
        method: 'POST',
        handler: rehearsals.POST,
        does: 'Rehearses what would be left without some nodes or links',
        answers: 'Rehearsal',
      },
    ],
  },
  {
    path: '/overlays/{slug}/rehearsals/{id}',
    methods: [
      {
        method: 'GET',
        handler: rehearsal.GET,
        does: 'Reads a rehearsal and its answer',
        answers: 'Rehearsal',
      },
      { method: 'DELETE', handler: rehearsal.DELETE, does: 'Cancels a rehearsal', answers: 'Rehearsal' },
    ],
  },
  {
    path: '/overlays/{slug}/rules',
    methods: [
      {
        method: 'GET',
        handler: rules.GET,
        does: 'Lists warning rules and where each stands',
        answers: 'WarningRules',
      },
      { method: 'POST', handler: rules.POST, does: 'Adds a warning rule', answers: 'WarningRule' },
    ],
  },
  {
    path: '/overlays/{slug}/rules/{id}',
    methods: [
      { method: 'PATCH', handler: rule.PATCH, does: 'Changes a warning rule', answers: 'WarningRule' },
      { method: 'DELETE', handler: rule.DELETE, does: 'Removes a warning rule', answers: null },
    ],
  },
  {
    path: '/overlays/{slug}/rules/preview',
    methods: [
      {
        method: 'POST',
        handler: rulePreview.POST,
        does: 'Tries a rule on history; changes nothing',
        answers: 'RulePreview',
      },
    ],
  },
  {
    path: '/overlays/{slug}/windows',
    methods: [
      {
        method: 'GET',
        handler: windows.GET,
        does: 'Lists maintenance windows',
        answers: 'MaintenanceWindows',
      },
      {
        method: 'POST',
        handler: windows.POST,
        does: 'Plans a maintenance window',
        answers: 'MaintenanceWindow',
      },
    ],
  },
  {
    path: '/overlays/{slug}/windows/{id}',
    methods: [
      {
        method: 'DELETE',
        handler: window.DELETE,
        does: 'Ends a maintenance window',
        answers: 'MaintenanceWindow',
      },
    ],
  },
  {
    path: '/overlays/{slug}/export/{file}',
    methods: [
      { method: 'GET', handler: exported.GET, does: 'Hands out what one may see as a file', answers: null },
    ],
  },
  {
    path: '/overlays/{slug}/partners',
    methods: [
      { method: 'GET', handler: partners.GET, does: 'Lists the teams that share it', answers: 'Partners' },
      {
        method: 'PATCH',
        handler: partners.PATCH,
        does: 'Changes what the caller’s team shows the others',
        answers: 'Partners',
      },
    ],
  },
  {
    path: '/overlays/{slug}/partners/{team}',
    methods: [
      { method: 'DELETE', handler: partner.DELETE, does: 'Ends a team’s part', answers: 'PartnerEnded' },
    ],
  },
  {
    path: '/overlays/{slug}/partners/invitations',
    methods: [
      {
        method: 'POST',
        handler: invitations.POST,
        does: 'Makes an invitation, whose code is shown once',
        answers: 'CreatedInvitation',
      },
    ],
  },
  {
    path: '/overlays/{slug}/partners/invitations/{id}',
    methods: [
      {
        method: 'DELETE',
        handler: invitation.DELETE,
        does: 'Withdraws an invitation',
        answers: 'Invitation',
      },
    ],
  },
  {
    path: '/partnerships',
    methods: [
      {
        method: 'POST',
        handler: partnerships.POST,
        does: 'Takes part in an overlay of another team, by its invitation',
        answers: 'JoinedOverlay',
      },
    ],
  },
  {
    path: '/overlays/{slug}/joining-codes',
    methods: [
      { method: 'GET', handler: joiningCodes.GET, does: 'Lists joining codes', answers: 'JoiningCodes' },
      {
        method: 'POST',
        handler: joiningCodes.POST,
        does: 'Makes a joining code, which is shown once',
        answers: 'CreatedJoiningCode',
      },
    ],
  },
  {
    path: '/overlays/{slug}/joining-codes/{id}',
    methods: [
      {
        method: 'DELETE',
        handler: joiningCode.DELETE,
        does: 'Revokes a joining code',
        answers: 'JoiningCode',
      },
    ],
  },
  {
    path: '/overlays/{slug}/upgrades',
    methods: [
      {
        method: 'GET',
        handler: upgrades.GET,
        does: 'Reads versions of the agent, and what is offered to whom',
        answers: 'Upgrades',
      },
      {
        method: 'POST',
        handler: upgrades.POST,
        does: 'Offers a version of the agent',
        answers: 'UpgradeOffer',
      },
    ],
  },
  {
    path: '/overlays/{slug}/upgrades/{id}',
    methods: [{ method: 'DELETE', handler: upgrade.DELETE, does: 'Halts an offer', answers: 'UpgradeOffer' }],
  },
  {
    path: '/overlays/{slug}/signing-key',
    methods: [
      {
        method: 'GET',
        handler: signingKey.GET,
        does: 'Reads the key that signs passes and orders',
        answers: 'SigningKey',
      },
      { method: 'POST', handler: signingKey.POST, does: 'Begins to replace that key', answers: 'SigningKey' },
    ],
  },
  {
    path: '/incidents',
    methods: [
      {
        method: 'GET',
        handler: incidents.GET,
        does: 'Lists incidents of your teams, newest first',
        answers: 'Incidents',
      },
    ],
  },
  {
    path: '/incidents/{number}',
    methods: [
      {
        method: 'GET',
        handler: incident.GET,
        does: 'Reads an incident with all that is known of it',
        answers: 'IncidentWhole',
      },
    ],
  },
  {
    path: '/incidents/{number}/files',
    methods: [
      {
        method: 'POST',
        handler: incidentFiles.POST,
        does: 'Keeps a file with an incident',
        answers: 'IncidentFile',
      },
    ],
  },
  {
    path: '/deliveries',
    methods: [
      {
        method: 'GET',
        handler: deliveries.GET,
        does: 'Lists messages that were sent, newest first',
        answers: 'Deliveries',
      },
    ],
  },
  {
    path: '/deliveries/{id}/retry',
    methods: [
      { method: 'POST', handler: retry.POST, does: 'Sends a failed message once more', answers: 'Id' },
    ],
  },
]
