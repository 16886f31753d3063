import * as joiningCode from '@/app/api/v1/overlays/[slug]/joining-codes/[id]/route'
import * as joiningCodes from '@/app/api/v1/overlays/[slug]/joining-codes/route'
import * as readmission from '@/app/api/v1/overlays/[slug]/nodes/[name]/readmission/route'
import * as revocation from '@/app/api/v1/overlays/[slug]/nodes/[name]/revocation/route'
import * as partner from '@/app/api/v1/overlays/[slug]/partners/[team]/route'
import * as invitation from '@/app/api/v1/overlays/[slug]/partners/invitations/[id]/route'
import * as invitations from '@/app/api/v1/overlays/[slug]/partners/invitations/route'
import * as partners from '@/app/api/v1/overlays/[slug]/partners/route'
import * as signingKey from '@/app/api/v1/overlays/[slug]/signing-key/route'
import * as upgrade from '@/app/api/v1/overlays/[slug]/upgrades/[id]/route'
import * as upgrades from '@/app/api/v1/overlays/[slug]/upgrades/route'
import * as partnerships from '@/app/api/v1/partnerships/route'
import type { PathRow } from '@/lib/openapi'

/** Who takes part: agents, teams, versions and keys. */
export const KEEPING: readonly PathRow[] = [
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
]
