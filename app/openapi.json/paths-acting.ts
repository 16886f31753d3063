import * as retry from '@/app/api/v1/deliveries/[id]/retry/route'
import * as deliveries from '@/app/api/v1/deliveries/route'
import * as incidentFiles from '@/app/api/v1/incidents/[number]/files/route'
import * as incident from '@/app/api/v1/incidents/[number]/route'
import * as incidents from '@/app/api/v1/incidents/route'
import * as overlayIncidents from '@/app/api/v1/overlays/[slug]/incidents/route'
import * as rehearsal from '@/app/api/v1/overlays/[slug]/rehearsals/[id]/route'
import * as rehearsals from '@/app/api/v1/overlays/[slug]/rehearsals/route'
import * as joinedLink from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/joined/route'
import * as plannedLink from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/route'
import * as plannedLinks from '@/app/api/v1/overlays/[slug]/reinforcement/planned/route'
import * as reinforcement from '@/app/api/v1/overlays/[slug]/reinforcement/route'
import * as rule from '@/app/api/v1/overlays/[slug]/rules/[id]/route'
import * as rulePreview from '@/app/api/v1/overlays/[slug]/rules/preview/route'
import * as rules from '@/app/api/v1/overlays/[slug]/rules/route'
import * as window from '@/app/api/v1/overlays/[slug]/windows/[id]/route'
import * as windows from '@/app/api/v1/overlays/[slug]/windows/route'
import type { PathRow } from '@/lib/openapi'

/** What is warned of, rehearsed and planned. */
export const ACTING: readonly PathRow[] = [
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
